import type { PlatformModel } from "../../models/decision/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { GuideGeometry } from "../../shared/vocabulary.ts";
import type { Ledger } from "../ledger/mod.ts";
import {
  type CutbackRecord,
  type FacetsRecord,
  type FringesRecord,
  type GeometryRecord,
  type GuideRecord,
  type LotDesign,
  type ModesRecord,
  type Placed,
  type PolingRecord,
  recordsOf,
  type TuningRecord,
} from "../records.ts";
import type { ReduceRemark, TraitRow } from "../traits/trait_row.ts";

/** Everything that a lot's readings are reduced with. */
export interface LotReadings {
  readonly lot: string;
  readonly design: LotDesign;
  readonly platform: Platform;
  readonly model: PlatformModel;
  readonly cutback: readonly CutbackRecord[];
  readonly fringes: readonly FringesRecord[];
  readonly poling: readonly PolingRecord[];
  readonly facets: readonly FacetsRecord[];
  readonly modes: readonly ModesRecord[];
  readonly tuning: readonly TuningRecord[];
  readonly geometry: readonly GeometryRecord[];
}

/** What one kind of reading was reduced to. */
export interface Reduced {
  readonly traits: TraitRow[];
  readonly remarks: ReduceRemark[];
}

/** Reads all readings in force of a lot but its walls, which are streamed. */
export async function loadReadings(
  ledger: Ledger,
  design: LotDesign,
  platform: Platform,
  model: PlatformModel,
): Promise<LotReadings> {
  const { lot } = design.lot;
  return {
    lot,
    design,
    platform,
    model,
    cutback: await recordsOf(ledger, "cutback", lot),
    fringes: await recordsOf(ledger, "fringes", lot),
    poling: await recordsOf(ledger, "poling", lot),
    facets: await recordsOf(ledger, "facets", lot),
    modes: await recordsOf(ledger, "modes", lot),
    tuning: await recordsOf(ledger, "tuning", lot),
    geometry: await recordsOf(ledger, "geometry", lot),
  };
}

/** The unit columns of a trait row. */
export function placeOf(
  reading: Pick<Placed, "scope" | "unit" | "wafer" | "die_id" | "guide_id">,
  design: LotDesign,
): Pick<TraitRow, "scope" | "unit" | "wafer" | "die_id" | "guide_id" | "width_um"> {
  const guide = reading.guide_id === null ? undefined : design.guideById.get(reading.guide_id);
  const { scope, unit, wafer, die_id, guide_id } = reading;
  return { scope, unit, wafer, die_id, guide_id, width_um: guide?.width_um ?? null };
}

/** The cross-section that the index models are asked with. */
export const geometryOf = (guide: Pick<GuideRecord, "width_um">): GuideGeometry => ({
  width_um: guide.width_um,
});

/** A stated u, else the platform's default, else 0 (not known). */
export function uncertaintyOf(
  stated: number | null,
  fallback: number | undefined,
): { readonly u: number; readonly from: "stated" | "platform" } {
  return stated !== null ? { u: stated, from: "stated" } : { u: fallback ?? 0, from: "platform" };
}

/** Splits rows by a key, in order of first appearance. */
export function grouped<T>(rows: readonly T[], key: (row: T) => string): T[][] {
  const groups = new Map<string, T[]>();
  for (const row of rows) {
    const k = key(row);
    const held = groups.get(k);
    if (held === undefined) groups.set(k, [row]);
    else held.push(row);
  }
  return [...groups.values()];
}

/** Kinds of which some reading has no u, neither its own nor the platform's: it counts as exact, and that has to be said. */
export function unknownUncertainties(readings: LotReadings): ReduceRemark[] {
  const { defaults } = readings.platform;
  const kinds = [
    ["cutback", readings.cutback.map((r) => r.u_insertion_loss_db), defaults.u_insertion_loss_db],
    ["fringes", readings.fringes.map((r) => r.u_contrast), defaults.u_contrast],
    ["facets", readings.facets.map((r) => r.u_reflectivity), defaults.u_reflectivity],
    ["modes", readings.modes.map((r) => r.u_mfd_um), defaults.u_mfd_um],
  ] as const;
  return kinds.flatMap(([kind, stated, fallback]) => {
    const without = stated.filter((u) => u === null).length;
    if (without === 0 || fallback !== undefined) return [];
    return [{
      code: "u_unknown",
      unit: readings.lot,
      statement:
        `${without} of ${stated.length} ${kind} readings of ${readings.lot} state no u, and platform ` +
        `${readings.platform.platform} has no default for it: they count as exact`,
    }];
  });
}
