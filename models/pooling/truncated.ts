// Pure: no I/O, no clock, no hidden randomness.
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import type { Uncertain } from "../../shared/vocabulary.ts";
import { lowerQuantile } from "./lower_quantile.ts";

/** What is known of a bounded trait once the impossible part of its normal is cut off. */
export interface Truncated extends Uncertain {
  /**
   * 2.5 % and 97.5 % quantiles; the bound itself where the uncut 95 % interval reaches beyond it, so that a true value on
   * its bound (no loss at all, no domain missing) is inside.
   */
  readonly lo: number;
  readonly hi: number;
}

/** Beyond this many standard deviations only the slope of the tail is left: it falls off exponentially. */
const FAR = 30;

/**
 * Mean, standard deviation and quantiles of a normal cut at its natural bounds: `value` becomes the mean, `u` the standard
 * deviation of what is left (N. L. Johnson & S. Kotz, Continuous Univariate Distributions, ch. 13; from memory).
 * The bounds belong to the true value: readings keep their normal errors, so a value below 0 is a fair summary of them.
 */
export function truncated(
  { value, u }: Uncertain,
  { low = -Infinity, high = Infinity }: { readonly low?: number; readonly high?: number },
): Truncated {
  if (!(low < high)) throw new RangeError(`Cannot cut at ${low} and ${high}: need low < high`);
  const left = cut(value, u, low, high);
  return {
    ...left,
    lo: value - HALF_WIDTH * u <= low ? low : left.lo,
    hi: value + HALF_WIDTH * u >= high ? high : left.hi,
  };
}

/** Half a 95 % interval of a standard normal. */
const HALF_WIDTH = normalQuantile(0.975, 0, 1);

function cut(value: number, u: number, low: number, high: number): Truncated {
  if (u === 0) {
    const at = Math.min(high, Math.max(low, value));
    return { value: at, u: 0, lo: at, hi: at };
  }
  const [a, b] = [(low - value) / u, (high - value) / u];
  // Mirrored so that the nearer tail is the lower one: upper tails of a cumulative distribution have no digits left.
  if (a > 0) {
    const m = cut(-value, u, -high, -low);
    return { value: -m.value, u: m.u, lo: -m.hi, hi: -m.lo };
  }
  if (b < -FAR) return exponentialTail(high, low, u / -b);
  const [pa, pb] = [a === -Infinity ? 0 : normalCdf(a, 0, 1), b === Infinity ? 1 : normalCdf(b, 0, 1)];
  const mass = pb - pa;
  const [fa, fb] = [normalDensity(a), normalDensity(b)];
  const shift = (fa - fb) / mass;
  const variance = 1 + ((a === -Infinity ? 0 : a * fa) - (b === Infinity ? 0 : b * fb)) / mass -
    shift * shift;
  const at = (q: number) => Math.min(high, Math.max(low, value + u * lowerQuantile(pa + q * mass)));
  return { value: value + u * shift, u: u * Math.sqrt(Math.max(0, variance)), lo: at(0.025), hi: at(0.975) };
}

/** The tail below `high` of a normal far above it; its length is cut where the other bound is. */
function exponentialTail(high: number, low: number, length: number): Truncated {
  const width = (high - low) / length;
  const kept = -Math.expm1(-width);
  // Moments of an exponential cut at `width`; the terms vanish when there is no other bound.
  const last = width === Infinity ? 0 : width * Math.exp(-width) / kept;
  const mean = 1 - last;
  const square = 2 * (1 - last) - (width === Infinity ? 0 : width * last);
  const at = (q: number) => high + length * Math.log1p(-q * kept);
  return {
    value: high - length * mean,
    u: length * Math.sqrt(square - mean * mean),
    lo: at(0.975),
    hi: at(0.025),
  };
}

const normalDensity = (z: number): number => Math.exp(-0.5 * z * z) / Math.sqrt(2 * Math.PI);
