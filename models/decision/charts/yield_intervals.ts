// Pure: no I/O, no clock, no hidden randomness.
import betaQuantile from "@stdlib/stats-base-dists-beta-quantile";
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import { checkShare, tFactor } from "../tails.ts";

export interface Interval {
  readonly lo: number;
  readonly hi: number;
}

export interface Yield {
  readonly good: number;
  readonly of: number;
  /** good/of; NaN for none of none. */
  readonly value: number;
  readonly confidence: number;
  /** Exact two-sided interval (C. J. Clopper, E. S. Pearson, Biometrika 26, 404 (1934)): never covers less than it says. */
  readonly exact: Interval;
  /** Score interval (E. B. Wilson, J. Am. Stat. Assoc. 22, 209 (1927)): covers what it says in the mean. */
  readonly wilson: Interval;
}

/**
 * A yield from a count of independent units, with its intervals. Units that share their fate (guides of a die, dies of a
 * wafer) need {@link groupedYield}.
 * @throws RangeError unless `good` and `of` are integers with 0 ≤ good ≤ of
 */
export function yieldOf(good: number, of: number, confidence = 0.95): Yield {
  checkShare(confidence, "confidence");
  checkCount(good, of);
  return {
    good,
    of,
    value: good / of,
    confidence,
    exact: clopperPearson(good, of, (1 - confidence) / 2),
    wilson: wilson(good, of, normalQuantile((1 + confidence) / 2, 0, 1)),
  };
}

/** One-sided bounds of a yield, each held with the whole `confidence`. */
export function yieldBounds(
  good: number,
  of: number,
  confidence = 0.95,
): { exact: Interval; wilson: Interval } {
  checkShare(confidence, "confidence");
  checkCount(good, of);
  return {
    exact: clopperPearson(good, of, 1 - confidence),
    wilson: wilson(good, of, normalQuantile(confidence, 0, 1)),
  };
}

export interface GroupedYield extends Yield {
  readonly groups: number;
  /** Variance of the yield over that of as many independent units, not below 1. */
  readonly designEffect: number;
  /** Independent units that would say as much. */
  readonly effectiveUnits: number;
}

/**
 * A yield whose units come in groups that share their fate, with the exact and the score interval of the effective number of units
 * (E. L. Korn, B. I. Graubard, Survey Methodol. 24, 193 (1998)). The design effect is the variance of the ratio estimator
 * between groups over that of independent units, taken as at least 1, and the effective number is cut for the few groups by the
 * squared ratio of Student factors. Where all units are good or all bad the spread between groups cannot be seen; then each
 * group counts as one unit. Empty groups are left out.
 * @throws RangeError for impossible counts or fewer than 2 groups with units
 */
export function groupedYield(
  groups: readonly { readonly good: number; readonly of: number }[],
  confidence = 0.95,
): GroupedYield {
  checkShare(confidence, "confidence");
  for (const g of groups) checkCount(g.good, g.of);
  const kept = groups.filter((g) => g.of > 0);
  const m = kept.length;
  if (m < 2) throw new RangeError(`Cannot see how units share their fate in ${m} groups: need at least 2`);
  const good = kept.reduce((sum, g) => sum + g.good, 0);
  const of = kept.reduce((sum, g) => sum + g.of, 0);
  const value = good / of;
  const between = kept.reduce((sum, g) => sum + (g.good - value * g.of) ** 2, 0) * m / (m - 1) / of ** 2;
  const certain = good === 0 || good === of;
  const designEffect = certain ? of / m : Math.max(1, between / (value * (1 - value) / of));
  const fewGroups = certain ? 1 : (tFactor(confidence, of - 1) / tFactor(confidence, m - 1)) ** 2;
  const effectiveUnits = of / designEffect * Math.min(1, fewGroups);
  const effectiveGood = certain && good === of ? effectiveUnits : value * effectiveUnits;
  return {
    good,
    of,
    value,
    confidence,
    groups: m,
    designEffect,
    effectiveUnits,
    exact: clopperPearson(effectiveGood, effectiveUnits, (1 - confidence) / 2),
    wilson: wilson(effectiveGood, effectiveUnits, normalQuantile((1 + confidence) / 2, 0, 1)),
  };
}

function checkCount(good: number, of: number): void {
  if (!Number.isSafeInteger(good) || !Number.isSafeInteger(of) || good < 0 || good > of) {
    throw new RangeError(`Cannot give the yield of ${good} in ${of}: need integers with 0 <= good <= units`);
  }
}

/** `tail` is the probability left out at either end. Counts may be real. */
function clopperPearson(good: number, of: number, tail: number): Interval {
  return {
    lo: good === 0 ? 0 : betaQuantile(tail, good, of - good + 1),
    hi: good === of ? 1 : betaQuantile(1 - tail, good + 1, of - good),
  };
}

function wilson(good: number, of: number, z: number): Interval {
  if (of === 0) return { lo: 0, hi: 1 };
  const p = good / of;
  const scale = 1 + z * z / of;
  const middle = (p + z * z / (2 * of)) / scale;
  const half = z / scale * Math.sqrt(p * (1 - p) / of + z * z / (4 * of * of));
  // At the ends the difference of equal terms leaves a rounding error.
  return {
    lo: good === 0 ? 0 : Math.max(0, middle - half),
    hi: good === of ? 1 : Math.min(1, middle + half),
  };
}
