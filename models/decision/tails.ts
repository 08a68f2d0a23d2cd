// Pure: no I/O, no clock, no hidden randomness.
import betaCdf from "@stdlib/stats-base-dists-beta-cdf";
import betaQuantile from "@stdlib/stats-base-dists-beta-quantile";
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";

// Tail probabilities by the incomplete beta function of the complement: 1 − cdf would leave no digit of a small one.

/** P(F > f) of the F distribution with `d1` and `d2` degrees of freedom (real, > 0); 1 for f ≤ 0, NaN for NaN. */
export function fTail(f: number, d1: number, d2: number): number {
  if (f <= 0) return 1;
  if (f === Infinity) return 0;
  return betaCdf(d2 / (d2 + d1 * f), d2 / 2, d1 / 2);
}

/** P(|T| > |t|) of Student's t with `df` degrees of freedom (real, > 0). */
export function tTwoSided(t: number, df: number): number {
  return fTail(t * t, 1, df);
}

/** P(|Z| > |z|) of a standard normal. */
export function normalTwoSided(z: number): number {
  return 2 * normalCdf(-Math.abs(z), 0, 1);
}

/** Quantile of the F distribution: P(F ≤ quantile) = p. */
export function fQuantile(p: number, d1: number, d2: number): number {
  // From whichever end is nearer: x near 1 has lost the digits of 1 − x.
  const x = betaQuantile(p, d1 / 2, d2 / 2);
  if (x < 0.5) return d2 * x / (d1 * (1 - x));
  const y = betaQuantile(1 - p, d2 / 2, d1 / 2);
  return d2 * (1 - y) / (d1 * y);
}

/** The t that |T| stays below with probability `confidence`. */
export function tFactor(confidence: number, df: number): number {
  return Math.sqrt(fQuantile(confidence, 1, df));
}

/** @throws RangeError unless `level` lies strictly between 0 and 1 */
export function checkShare(level: number, what: string): void {
  if (!(level > 0 && level < 1)) {
    throw new RangeError(`Cannot use a ${what} of ${level}: need more than 0 and less than 1`);
  }
}
