// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";
import { HALF_MAXIMUM } from "./_sinc.ts";

/**
 * Length of the uniform grating whose tuning curve is as wide: 5.566229513/|dΔβ/dx|/FWHM, m.
 * @param fwhm of the tuning curve, in the unit of x
 * @param mismatchSlope dΔβ/dx at the peak, 1/m per unit of x, either sign
 * @throws RangeError for a width that is not positive, or a slope that is 0 or not finite
 */
export function effectiveLength(fwhm: Uncertain, mismatchSlope: number): Uncertain {
  if (!(fwhm.value > 0 && fwhm.value < Infinity) || !(fwhm.u >= 0) || !Number.isFinite(1 / mismatchSlope)) {
    throw new RangeError(
      `Cannot take a length from a width of ${fwhm.value} (u ${fwhm.u}) at ${mismatchSlope} 1/m per unit: need > 0, slope not 0`,
    );
  }
  const value = 4 * HALF_MAXIMUM / (Math.abs(mismatchSlope) * fwhm.value);
  return { value, u: value * fwhm.u / fwhm.value };
}
