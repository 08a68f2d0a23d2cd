// Pure: no I/O, no clock, no hidden randomness.
import { lambdaOf, omegaOf } from "../../shared/units.ts";

/** A spectral filter of one arm, given in wavelength as filters are sold. */
export interface Filter {
  readonly shape: "flat-top" | "gaussian";
  /** Full width at half maximum of the power transmission, m. */
  readonly fwhm: number;
  /** Power transmission at the centre, 0…1. */
  readonly peak: number;
  /** Centre, m. */
  readonly centre: number;
}

/** Power transmission at angular frequency `omega` (rad/s); both edges of a flat top belong to its band. */
export function transmission(filter: Filter, omega: number): number {
  const x = (lambdaOf(omega) - filter.centre) / filter.fwhm;
  if (filter.shape === "flat-top") return Math.abs(x) <= 0.5 ? filter.peak : 0;
  return filter.peak * Math.exp(-4 * Math.LN2 * x * x);
}

/**
 * The band [lower, upper] in rad/s that stands for a filter: all of a flat top, ±2 FWHM of a gaussian (beyond which
 * it passes less than 1.6e-5 of its peak).
 * @throws RangeError for a width, centre or peak that no filter has
 */
export function filterBand(filter: Filter): [number, number] {
  const { shape, fwhm, peak, centre } = filter;
  const half = shape === "flat-top" ? fwhm / 2 : 2 * fwhm;
  if (!(fwhm > 0 && centre - half > 0 && centre < Infinity)) {
    throw new RangeError(
      `Cannot place a ${shape} filter: found FWHM ${fwhm} m at ${centre} m, need FWHM > 0 and a band above 0`,
    );
  }
  if (!(peak >= 0 && peak <= 1)) {
    throw new RangeError(`Cannot place a ${shape} filter: found peak ${peak}, need 0…1`);
  }
  return [omegaOf(centre + half), omegaOf(centre - half)];
}
