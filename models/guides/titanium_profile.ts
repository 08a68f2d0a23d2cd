// Pure: no I/O, no clock, no hidden randomness.
// Titanium in-diffused LiNbO3: E. Strake, G. P. Bava & I. Montrosset, J. Lightwave Technol. 6, 1126 (1988); formulas
// and constants from memory, 15 % when used as physics.
import cdf from "@stdlib/stats-base-dists-normal-cdf";

/** Titanium atoms per volume of the deposited film, 1/cm³. */
const FILM_DENSITY = 5.67e22;

/** A diffused stripe: widths and lengths in m, temperature is in the diffusion lengths already. */
export interface TitaniumStripe {
  readonly width: number;
  /** Thickness of the titanium strip before diffusion, m. */
  readonly titanium: number;
  /** Lateral and vertical diffusion lengths (1/e of the gaussian), m. */
  readonly lateral: number;
  readonly depth: number;
}

/** Error function through the normal distribution. */
export const erf = (x: number): number => 2 * cdf(x * Math.SQRT2, 0, 1) - 1;

/** Titanium concentration at the surface, x from the stripe's middle (m), in 1/cm³: all titanium of the strip is in the crystal. */
export function surfaceConcentration(stripe: TitaniumStripe, x: number): number {
  const { width, titanium, lateral, depth } = stripe;
  return FILM_DENSITY * titanium / (Math.sqrt(Math.PI) * depth) *
    (erf((width / 2 + x) / lateral) + erf((width / 2 - x) / lateral));
}

/** Index increase of the extraordinary wave, linear in the concentration (1/cm³); `lambda` in m. */
export function titaniumStepExtraordinary(concentration: number, lambda: number): number {
  const x = (lambda * 1e6) ** 2;
  return 0.839 * x / (x - 0.0645) * 1.2e-23 * concentration;
}

/** Index increase of the ordinary wave, to the power 0.55 of the concentration (1/cm³); `lambda` in m. */
export function titaniumStepOrdinary(concentration: number, lambda: number): number {
  const x = (lambda * 1e6) ** 2;
  return 0.67 * x / (x - 0.13) * (1.3e-25 * concentration) ** 0.55;
}
