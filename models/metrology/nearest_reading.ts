// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";

/** Which readings stand in at a wavelength, and from how far. */
export interface NearestReading {
  /** Position of the first reading at the nearest wavelength. */
  readonly index: number;
  /** All readings at that wavelength: repeats count alike. */
  readonly repeats: readonly number[];
  /** Signed distance of the reading, (λ_reading − λ)/λ. */
  readonly distance: number;
}

/**
 * The reading nearest in wavelength, within a fraction of it; null if there is none (then the platform's default
 * stands). Of two equally near the shorter wavelength. The caller offers readings of one polarisation only: a reading
 * never stands in for the other polarisation.
 * @param readings vacuum wavelengths in m
 * @param lambda where the trait is needed, m
 * @throws RangeError for a wavelength that is not positive
 */
export function nearestReading(
  readings: readonly { readonly lambda: number }[],
  lambda: number,
  withinFraction = 0.05,
): NearestReading | null {
  if (!(lambda > 0 && lambda < Infinity) || readings.some((r) => !(r.lambda > 0 && r.lambda < Infinity))) {
    throw new RangeError(`Cannot look for the reading nearest to ${lambda} m: need wavelengths > 0`);
  }
  // A millionth of a nanometre absorbs the rounding of units: equally near, and exactly on the limit.
  const same = 1e-15 / lambda;
  let index = -1;
  let distance = Infinity;
  readings.forEach((reading, k) => {
    const d = reading.lambda / lambda - 1;
    if (Math.abs(d) > withinFraction + same) return;
    const gain = Math.abs(distance) - Math.abs(d);
    if (gain > same || (gain >= -same && d < distance - same)) {
      index = k;
      distance = d;
    }
  });
  if (index < 0) return null;
  const repeats = readings.map((_, k) => k).filter((k) =>
    Math.abs(readings[k]!.lambda / lambda - 1 - distance) <= same
  );
  return { index: repeats[0]!, repeats, distance };
}

/** A mode's size carried to another wavelength: proportional to λ, and so is its u. All lengths in m. */
export function scaleModeSize(size: Uncertain, fromLambda: number, toLambda: number): Uncertain {
  const ratio = toLambda / fromLambda;
  return { value: size.value * ratio, u: size.u * ratio };
}
