// Pure: no I/O, no clock, no hidden randomness.
import { mean, standardDeviation } from "../../../shared/statistics.ts";

/** A group (a wafer) by its mean, within a batch (a lot). */
export interface GroupMean {
  readonly mean: number;
  readonly values: number;
}

/** What the means of groups of further batches may be. */
export interface NestedLimits {
  /** Mean of the batches' means. */
  readonly centre: number;
  /** Standard deviation of a group's mean about it: between batches, between groups of a batch, and what the group's values scatter. */
  readonly sd: number;
  /** Standard uncertainty of the centre. */
  readonly uCentre: number;
  /** Degrees of freedom of sd². */
  readonly degreesOfFreedom: number;
  /** Standard deviation between groups of one batch; null where no batch has two. */
  readonly betweenGroups: number | null;
  readonly batches: number;
}

/**
 * Limits for group means that differ from batch to batch by nature, where the limits of a mean chart (from the spread inside groups
 * alone) would call nearly every point. With batch means of variance B over L batches and groups of one batch of variance W,
 * a group of a further batch has B + W·(1 − 1/m), m the groups behind a batch mean; the degrees of freedom are those of the
 * sum (F. E. Satterthwaite, Biom. Bull. 2, 110 (1946)).
 * @returns null for fewer than 3 batches, or batches that do not differ
 */
export function nestedLimits(batches: readonly (readonly GroupMean[])[]): NestedLimits | null {
  const kept = batches.map((b) => b.filter((g) => g.values > 0)).filter((b) => b.length > 0);
  const L = kept.length;
  if (L < 3) return null;
  const means = kept.map((b) => mean(b.map((g) => g.mean)));
  const between = standardDeviation(means) ** 2;
  let [squares, df, share] = [0, 0, 0];
  kept.forEach((b, k) => {
    squares += b.reduce((sum, g) => sum + (g.mean - means[k]!) ** 2, 0);
    df += b.length - 1;
    share += (1 - 1 / b.length) / L;
  });
  const groups = df > 0 ? squares / df : 0;
  const total = between + share * groups;
  if (!(total > 1e-24 * mean(means) ** 2)) return null;
  return {
    centre: mean(means),
    sd: Math.sqrt(total),
    uCentre: Math.sqrt(between / L),
    degreesOfFreedom: total ** 2 /
      (between ** 2 / (L - 1) + (df > 0 ? (share * groups) ** 2 / df : 0)),
    betweenGroups: df > 0 ? Math.sqrt(groups) : null,
    batches: L,
  };
}
