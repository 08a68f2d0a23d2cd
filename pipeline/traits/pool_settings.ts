import { type LotObservation, type Spread, spreadFromDefault } from "../../models/pooling/mod.ts";
import type { DefaultTrait } from "../../shared/schemas/platform.ts";
import { mean, standardDeviation } from "../../shared/statistics.ts";
import { commonShare, type CountedObservation } from "./pool_observations.ts";
import type { TraitName } from "./trait_row.ts";

/** Traits that are pooled over guides, dies, wafers and lots. */
export type PooledTrait = Extract<TraitName, DefaultTrait>;

/** Natural bounds of what is pooled; readings may lie outside, true values can't. */
export const BOUNDS: Partial<Record<PooledTrait, { readonly low?: number; readonly high?: number }>> = {
  loss_db_cm: { low: 0 },
  mfd_x_um: { low: 0 },
  mfd_y_um: { low: 0 },
  duty: { low: 0, high: 1 },
  duty_sd: { low: 0 },
  merged: { low: 0, high: 1 },
  film_thickness_nm: { low: 0 },
  etch_depth_nm: { low: 0 },
  titanium_nm: { low: 0 },
  mismatch_sd_per_m: { low: 0 },
};

/**
 * Cross-sections are pooled within their lot: a scan's offset is counted beside them when the lot is reduced, and has to
 * meet the same cross-section when it is used, whatever lots come later.
 */
export const WITHIN_LOT: readonly TraitName[] = [
  "width_error_um",
  "film_thickness_nm",
  "etch_depth_nm",
  "titanium_nm",
];

/** Counts of rare events and spreads have skew errors: a tail that a normal would call impossible is theirs by nature. */
export const SKEW: readonly TraitName[] = ["merged", "duty_sd", "mismatch_sd_per_m"];

/**
 * Spreads where the platform states nothing. Several units tell them by themselves (all 0: not stated); a single one is taken
 * to be off by half of itself for other guides (common practice, no source), and never to hold for them as it was read.
 * Shares that scatter no more than counting makes them are taken to differ by as much as they are large: the error of counting
 * on one guide says nothing of how much guides differ.
 */
export function unstatedSpread(
  observations: readonly LotObservation[],
  counted: readonly CountedObservation[],
): Spread {
  const units = new Set(observations.map((o) => o.guide ?? o.die ?? o.wafer));
  if (counted.some((o) => o.counted !== undefined)) {
    const scatter = units.size < 2 ? 0 : standardDeviation(observations.map((o) => o.value));
    const counting = Math.sqrt(mean(observations.map((o) => o.u * o.u)));
    return spreadFromDefault(scatter > counting ? 0 : commonShare(counted));
  }
  if (units.size !== 1) return spreadFromDefault(0);
  return spreadFromDefault(Math.max(...observations.map(({ value, u }) => Math.max(u, Math.abs(value) / 2))));
}
