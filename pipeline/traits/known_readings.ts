import type { KnownReadingU, ReadingU } from "../../models/decision/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import { quantileOfSorted } from "../../shared/statistics.ts";
import type { TraitName, TraitRow } from "./trait_row.ts";

/** Traits by the methods that can still be used on a guide that is to be delivered: how their rows' method begins. */
const METHODS: readonly (readonly [trait: TraitName, method: string])[] = [
  ["loss_db_cm", "fringe contrast"],
  ["mfd_x_um", ""],
  ["mfd_y_um", ""],
  ["reflectivity", ""],
  ["duty", "poling windows"],
  ["duty_sd", "poling windows"],
  ["merged", "poling windows"],
  ["mismatch_offset_per_m", ""],
  ["mismatch_sd_per_m", ""],
  ["width_error_um", ""],
  ["film_thickness_nm", ""],
  ["etch_depth_nm", ""],
  ["titanium_nm", ""],
];

/** How well readings of a lot can tell traits: the median u of those it has, else what the platform states. */
export function knownReadingU(lot: string, rows: readonly TraitRow[], platform: Platform): KnownReadingU {
  const { defaults } = platform;
  const byTrait: Record<string, ReadingU> = {};
  for (const [trait, method] of METHODS) {
    const us = Float64Array.from(
      rows.filter((r) => r.trait === trait && r.method.startsWith(method) && r.u > 0),
      (r) => r.u,
    ).sort();
    const found = us.length > 0
      ? {
        u: quantileOfSorted(us, 0.5),
        from: us.length === 1 ? `the reading of lot ${lot}` : `median of ${us.length} of lot ${lot}`,
      }
      : stated(trait, defaults);
    if (found !== null) byTrait[trait] = found;
  }
  return { byTrait, contrast: defaults.u_contrast ?? null };
}

function stated(trait: TraitName, defaults: Platform["defaults"]): ReadingU | null {
  const given = (name: string, u: number | undefined) =>
    u === undefined ? null : { u, from: `the platform's ${name}` };
  switch (trait) {
    case "mfd_x_um":
    case "mfd_y_um":
      return given("u_mfd_um", defaults.u_mfd_um);
    case "reflectivity":
      return given("u_reflectivity", defaults.u_reflectivity);
    case "width_error_um":
      return given("u_value of width_um", defaults.u_value?.width_um);
    case "film_thickness_nm":
    case "etch_depth_nm":
    case "titanium_nm":
      return given(`u_value of ${trait}`, defaults.u_value?.[trait]);
    default:
      return null;
  }
}
