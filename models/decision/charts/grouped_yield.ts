// Pure: no I/O, no clock, no hidden randomness.
import betaQuantile from "@stdlib/stats-base-dists-beta-quantile";
import { checkShare, tFactor } from "../tails.ts";
import type { ShareInterval } from "../yields.ts";

/** A yield whose units come in groups that share their fate, with its limits. */
export interface GroupedYield extends ShareInterval {
  readonly good: number;
  readonly of: number;
  /** good/of. */
  readonly value: number;
  /** Groups with units. */
  readonly groups: number;
  /** Variance of the yield over that of as many independent units, not below 1. */
  readonly designEffect: number;
  /** Independent units that would say as much. */
  readonly effectiveUnits: number;
}

/**
 * Limits of a yield whose units (guides of a die, dies of a wafer) share their fate: the exact limits of the effective
 * number of units (E. L. Korn, B. I. Graubard, Survey Methodol. 24, 193 (1998)). The design effect is the variance of
 * the ratio estimator between groups over that of independent units, taken as at least 1; the effective number is cut for
 * few groups by the squared ratio of Student factors. Where all units are good or all bad the spread between groups
 * can't be seen; then each group counts as one unit. For independent units: `exactInterval()` of yields.ts.
 * @throws RangeError for counts that are no integers with 0 ≤ good ≤ units, or fewer than 2 groups with units
 */
export function groupedYield(
  groups: readonly { readonly good: number; readonly of: number }[],
  confidence = 0.95,
): GroupedYield {
  checkShare(confidence, "confidence");
  for (const g of groups) {
    if (!Number.isSafeInteger(g.good) || !Number.isSafeInteger(g.of) || g.good < 0 || g.good > g.of) {
      throw new RangeError(
        `Cannot give the yield of ${g.good} in ${g.of}: need integers with 0 <= good <= units`,
      );
    }
  }
  const kept = groups.filter((g) => g.of > 0);
  const m = kept.length;
  if (m < 2) throw new RangeError(`Cannot see how units share their fate in ${m} groups: need at least 2`);
  const good = kept.reduce((sum, g) => sum + g.good, 0);
  const of = kept.reduce((sum, g) => sum + g.of, 0);
  const value = good / of;
  const tail = (1 - confidence) / 2;
  if (good === 0 || good === of) {
    return {
      good,
      of,
      value,
      groups: m,
      designEffect: of / m,
      effectiveUnits: m,
      low: good === 0 ? 0 : betaQuantile(tail, m, 1),
      high: good === 0 ? betaQuantile(1 - tail, 1, m) : 1,
    };
  }
  const between = kept.reduce((sum, g) => sum + (g.good - value * g.of) ** 2, 0) * m / (m - 1) / of ** 2;
  const designEffect = Math.max(1, between / (value * (1 - value) / of));
  const student = tFactor(confidence, of - 1) / tFactor(confidence, m - 1);
  const units = of / designEffect * student ** 2;
  return {
    good,
    of,
    value,
    groups: m,
    designEffect,
    effectiveUnits: units,
    low: rounded(betaQuantile(tail, value * units, (1 - value) * units + 1)),
    high: rounded(betaQuantile(1 - tail, value * units + 1, (1 - value) * units)),
  };
}

/** Less than one unit's worth of evidence leaves limits of 1e-100: none that a yield could be told by. */
const rounded = (limit: number): number => limit < 1e-9 ? 0 : limit > 1 - 1e-9 ? 1 : limit;
