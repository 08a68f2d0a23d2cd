// Pure: no I/O, no clock, no hidden randomness.
import type { Platform } from "../../shared/schemas/platform.ts";
import { nm, toNm } from "../../shared/units.ts";
import type { Polarisation } from "../../shared/vocabulary.ts";

/** Traits that a platform may state a target for. */
export type TargetTrait = keyof Platform["targets"];

type Given = Platform["defaults"][TargetTrait];

/**
 * What a fabrication on this platform aims at: the platform's stated target, else its default. Null where it says neither.
 * @param at wavelength (m) and polarisation, for traits that depend on them: a mode's size goes with the wavelength
 */
export function targetOf(
  { targets, defaults }: Pick<Platform, "targets" | "defaults">,
  trait: TargetTrait,
  at?: { readonly lambda: number; readonly pol: Polarisation },
): number | null {
  const fallback = defaultAt(defaults[trait], at?.pol);
  const stated = targets[trait];
  const own = typeof stated === "object" ? at === undefined ? undefined : stated[at.pol] : stated;
  const value = own ?? fallback?.value ?? null;
  const scales = trait === "mfd_x_um" || trait === "mfd_y_um";
  if (value === null || !scales || at === undefined || fallback?.at_nm === undefined) return value;
  return value * toNm(at.lambda) / toNm(nm(fallback.at_nm));
}

function defaultAt(given: Given, pol: Polarisation | undefined): { value: number; at_nm?: number } | null {
  if (given === undefined) return null;
  if (typeof given === "number") return { value: given };
  if ("value" in given) {
    return given.at_nm === undefined ? { value: given.value } : { value: given.value, at_nm: given.at_nm };
  }
  return pol === undefined ? null : defaultAt(given[pol], pol);
}
