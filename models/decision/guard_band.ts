// Pure: no I/O, no clock, no hidden randomness.
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";

/**
 * Width of a one-sided guard band, in the unit of `u`: a value this far inside the limit conforms with that probability
 * (JCGM 106:2012, 8.3). @param confidence 0.5…1
 */
export function guardBand(u: number, confidence: number): number {
  if (!(u >= 0) || !(confidence >= 0.5 && confidence < 1)) {
    throw new RangeError(
      `Cannot make a guard band for u ${u} at ${confidence}: need u ≥ 0, 0.5 ≤ confidence < 1`,
    );
  }
  return u * normalQuantile(confidence, 0, 1);
}

/** An interval; ±Infinity where it is open. */
export interface Interval {
  readonly low: number;
  readonly high: number;
}

/** What a rule of acceptance does in the long run, as shares of everything that is made. */
export interface GlobalRisks {
  /** True value inside the tolerance. */
  readonly conforming: number;
  /** Accepted although outside the tolerance. */
  readonly consumer: number;
  /** Rejected although inside it. */
  readonly producer: number;
}

/**
 * Global consumer's and producer's risk of a normal process that is measured with a normal error (JCGM 106:2012, 9): joint
 * probabilities, not conditional ones.
 * @param process distribution of the true values
 * @param u standard uncertainty of a measurement
 */
export function globalRisks(
  process: { readonly mean: number; readonly sd: number },
  u: number,
  tolerance: Interval,
  acceptance: Interval,
): GlobalRisks {
  const { mean, sd } = process;
  if (!(sd > 0 && u > 0)) {
    throw new RangeError(`Cannot weigh risks: found spread ${sd} and u ${u}, need both > 0`);
  }
  const cdf = (x: number) => x === Infinity ? 1 : x === -Infinity ? 0 : normalCdf(x, mean, sd);
  const accepted = (x: number) =>
    normalCdf((acceptance.high - x) / u, 0, 1) - normalCdf((acceptance.low - x) / u, 0, 1);
  const over = (from: number, to: number) =>
    simpson((x) => Math.exp(-0.5 * ((x - mean) / sd) ** 2) * accepted(x), from, to, Math.min(sd, u)) /
    (sd * Math.sqrt(2 * Math.PI));
  const [least, most] = [mean - REACH * sd, mean + REACH * sd];
  const clip = (x: number) => Math.min(most, Math.max(least, x));
  const [low, high] = [clip(tolerance.low), clip(tolerance.high)];
  const conforming = cdf(tolerance.high) - cdf(tolerance.low);
  return {
    conforming,
    consumer: over(least, low) + over(high, most),
    producer: conforming - over(low, high),
  };
}

/** Beyond this many standard deviations nothing is made: 1e−16 of a normal. */
const REACH = 8.5;

/** Simpson's rule in steps of a twentieth of the narrowest feature: relative error below 1e−8 for normal edges. */
function simpson(f: (x: number) => number, from: number, to: number, feature: number): number {
  if (!(to > from)) return 0;
  const pairs = Math.min(100_000, Math.ceil((to - from) / feature * 10));
  const h = (to - from) / (2 * pairs);
  let sum = f(from) + f(to);
  for (let i = 1; i < 2 * pairs; i++) sum += (i % 2 === 1 ? 4 : 2) * f(from + i * h);
  return sum * h / 3;
}
