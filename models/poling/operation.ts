// Pure: no I/O, no clock, no hidden randomness.
import { crossings, scan } from "./_search.ts";

/** Accuracy of temperatures of operation, °C. */
export const TEMPERATURE_TOLERANCE = 1e-6;
/** |Δβ| − K relative to K at which a tangent counts as phase matched: far below any width, far above rounding. */
const TOUCH = 1e-11;

export interface Temperatures {
  /** °C, ascending. */
  readonly roots: number[];
  /** The lowest root; if there is none, the temperature of the range that comes nearest to one. */
  readonly nearest: number;
}

/** Intervals of at most 2 °C, and at least 24. */
export function temperatureIntervals(lo: number, hi: number): number {
  if (!(Number.isFinite(lo) && Number.isFinite(hi) && lo < hi)) {
    throw new RangeError(
      `Cannot search temperatures from ${lo} to ${hi} °C: need a finite range of positive length`,
    );
  }
  return Math.max(24, Math.ceil((hi - lo) / 2));
}

/**
 * All T in [lo, hi] (°C) with |Δβ(T)| = K(T), ascending, to 1e-6 °C: Δβ has either sign (it is negative for type-II
 * KTP). The range is scanned in steps of at most 2 °C, and every extreme of |Δβ| − K between the samples is looked at, so
 * two roots within a step and a touching point are found as long as Δβ is smooth over a few steps.
 * @param mismatch Δβ(T) without grating term, 1/m
 * @param gratingVector K(T) = 2π/Λ(T), 1/m, expansion included
 * @throws RangeError for an empty range or a function that is not finite
 */
export function phaseMatchingTemperatures(
  mismatch: (temperatureC: number) => number,
  gratingVector: (temperatureC: number) => number,
  [lo, hi]: readonly [number, number],
): Temperatures {
  const intervals = temperatureIntervals(lo, hi);
  const f = (t: number) => Math.abs(mismatch(t)) - gratingVector(t);
  const samples = scan(f, lo, hi, intervals, "phase-matching temperatures");
  return crossings(f, samples, 0, TEMPERATURE_TOLERANCE, TOUCH * Math.abs(gratingVector(lo)));
}
