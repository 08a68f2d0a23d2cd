// Pure: no I/O, no clock, no hidden randomness.
import { fTail } from "../tails.ts";

/** Spread of some values about the means of their groups. */
export interface SpreadSample {
  /** Mean square about the groups' means. */
  readonly variance: number;
  /** Values less groups. */
  readonly degreesOfFreedom: number;
  /** What of the variance the readings' own uncertainty makes: the mean of their u². */
  readonly readingVariance: number;
}

export interface SpreadComparison {
  /** Variance over what the reference lets one expect of values read as these were. */
  readonly ratio: number;
  /** P(a ratio as large) if nothing has grown: Fisher's F, one-sided, for normal values. */
  readonly p: number;
  readonly expectedVariance: number;
  readonly referenceDegrees: number;
}

/** Means and squares of several groups of values, as one sample. */
export function spreadOfGroups(
  groups: readonly { readonly values: readonly number[]; readonly readingVariance: number }[],
): SpreadSample {
  let [squares, degreesOfFreedom, reading, count] = [0, 0, 0, 0];
  for (const { values, readingVariance } of groups) {
    if (values.length === 0) continue;
    const centre = values.reduce((a, b) => a + b, 0) / values.length;
    squares += values.reduce((sum, v) => sum + (v - centre) ** 2, 0);
    degreesOfFreedom += values.length - 1;
    reading += values.length * readingVariance;
    count += values.length;
  }
  return {
    variance: degreesOfFreedom > 0 ? squares / degreesOfFreedom : NaN,
    degreesOfFreedom,
    readingVariance: count > 0 ? reading / count : NaN,
  };
}

/**
 * Whether a spread is larger than a reference's (variance ratio; NIST/SEMATECH e-Handbook, 1.3.5.9). Values that were read less
 * well than the reference's may spread by as much more without anything having grown: the difference of the readings' variances
 * is allowed for. Values that were read better are not held to less, so that the test stays on the safe side.
 * @returns null where either has too few degrees of freedom to say anything, or the reference does not spread
 */
export function compareSpread(
  sample: SpreadSample,
  reference: SpreadSample,
  least = { own: 2, reference: 4 },
): SpreadComparison | null {
  if (sample.degreesOfFreedom < least.own || reference.degreesOfFreedom < least.reference) return null;
  const expectedVariance = reference.variance +
    Math.max(0, sample.readingVariance - reference.readingVariance);
  if (!(expectedVariance > 0)) return null;
  const ratio = sample.variance / expectedVariance;
  return {
    ratio,
    p: fTail(ratio, sample.degreesOfFreedom, reference.degreesOfFreedom),
    expectedVariance,
    referenceDegrees: reference.degreesOfFreedom,
  };
}
