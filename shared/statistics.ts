// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "./vocabulary.ts";

/** Arithmetic mean; NaN for no values. */
export function mean(x: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < x.length; i++) sum += x[i]!;
  return sum / x.length;
}

/** Sample standard deviation (n − 1 in the denominator), centred before squaring; NaN for fewer than two values. */
export function standardDeviation(x: ArrayLike<number>): number {
  if (x.length < 2) return NaN;
  const centre = mean(x);
  let sum = 0;
  for (let i = 0; i < x.length; i++) sum += (x[i]! - centre) ** 2;
  return Math.sqrt(sum / (x.length - 1));
}

/**
 * Quantile of ascending values by linear interpolation between order statistics
 * (definition 7 of R. J. Hyndman & Y. Fan, Am. Stat. 50, 361 (1996)); NaN for no values.
 * @throws RangeError if `q` is not in 0…1
 */
export function quantileOfSorted(sorted: ArrayLike<number>, q: number): number {
  if (!(q >= 0 && q <= 1)) throw new RangeError(`Cannot take the quantile at ${q}: need 0…1`);
  if (sorted.length === 0) return NaN;
  const at = q * (sorted.length - 1);
  const low = Math.floor(at);
  const a = sorted[low]!;
  return low + 1 < sorted.length ? a + (at - low) * (sorted[low + 1]! - a) : a;
}

/**
 * Weighted mean of independent values, weights 1/u² (GUM). A value with u = 0 is exact: if there are such, only they
 * count. @throws RangeError for no values
 */
export function weightedMean(values: readonly Uncertain[]): Uncertain {
  if (values.length === 0) throw new RangeError("Cannot average 0 values: need at least 1");
  const exact = values.filter((v) => v.u === 0);
  if (exact.length > 0) return { value: mean(exact.map((v) => v.value)), u: 0 };
  // Weights relative to the smallest u: 1/u² alone overflows for very small u.
  const least = Math.min(...values.map((v) => v.u));
  let sumW = 0;
  let sumWX = 0;
  for (const v of values) {
    const w = (least / v.u) ** 2;
    sumW += w;
    sumWX += w * v.value;
  }
  return { value: sumWX / sumW, u: least / Math.sqrt(sumW) };
}
