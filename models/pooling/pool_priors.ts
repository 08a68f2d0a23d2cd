// Pure: no I/O, no clock, no hidden randomness.
import { mean, standardDeviation } from "../../shared/statistics.ts";
import type { Uncertain } from "../../shared/vocabulary.ts";
import { type SpreadPrior, spreadPrior } from "./components.ts";
import type { Leaf } from "./forest.ts";
import type { Spread } from "./inherit.ts";

/** Everything that is believed of a trait before a reading. */
export interface PoolPriors {
  /** Mean over all lots; u = Infinity when nobody states one. */
  readonly mean: Uncertain;
  readonly spread: SpreadPrior;
  /** Standard deviation of the difference that a design width makes. */
  readonly widthSd: number;
  /** Standard deviation of a trend's contribution at the edge of the wafer. */
  readonly trendSd: number;
}

/** Weight of the platform's spreads, in degrees of freedom: a few groups lean on them, many groups don't. */
export const PLATFORM_DEGREES = 2;
/** When nobody states spreads their scale comes from the readings, with the weight of half a degree of freedom. */
const VAGUE_DEGREES = 0.5;

/**
 * Priors from a platform's default and spreads. The default's u is the spread of all guides of all lots: what the effects
 * leave of it is the uncertainty of the mean, but at least half as much as all effects together (a quarter of the variance).
 * Spreads that are all 0 are not stated; then the readings give the scale: their scatter (about the default when there
 * is one), or their own error if that is larger.
 * @returns null when there is nothing to take a scale from: the readings say nothing about other guides
 */
export function poolPriors(
  leaves: readonly Leaf[],
  spread: Spread,
  fallback: Uncertain | null,
  degrees: number = PLATFORM_DEGREES,
): PoolPriors | null {
  const stated = Math.hypot(spread.lotSd, spread.waferSd, spread.dieSd, spread.guideSd);
  if (stated > 0) {
    const u = fallback?.u ?? 0;
    const left = Math.max(u ** 2 - stated ** 2, Math.max(u, stated) ** 2 / 4);
    return {
      mean: fallback === null ? { value: 0, u: Infinity } : { value: fallback.value, u: Math.sqrt(left) },
      spread: spreadPrior(spread, degrees),
      widthSd: Math.max(u, stated),
      trendSd: 2 * (Math.hypot(spread.waferSd, spread.dieSd) || stated),
    };
  }
  const values = leaves.map((l) => l.value);
  const scatter = fallback === null
    ? standardDeviation(values)
    : Math.sqrt(mean(values.map((x) => (x - fallback.value) ** 2)));
  if (Number.isNaN(scatter)) return null;
  const scale = Math.max(scatter, Math.sqrt(mean(leaves.map((l) => l.variance))), fallback?.u ?? 0);
  if (!(scale > 0)) return null;
  const each = { lotSd: scale, waferSd: scale, dieSd: scale, guideSd: scale };
  return {
    mean: fallback === null ? { value: 0, u: Infinity } : { value: fallback.value, u: scale },
    spread: spreadPrior(each, VAGUE_DEGREES),
    widthSd: scale,
    trendSd: 2 * scale,
  };
}
