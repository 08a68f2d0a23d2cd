// Pure: no I/O, no clock, no hidden randomness.
// Titanium in-diffused LiNbO3: E. Strake, G. P. Bava & I. Montrosset, J. Lightwave Technol. 6, 1126 (1988); formulas
// and constants from memory, 15 % when used as physics.
import cdf from "@stdlib/stats-base-dists-normal-cdf";
import { FILM_DENSITY, INCREASE } from "./titanium_constants.ts";

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
  return increase(INCREASE.extraordinary, concentration, lambda);
}

/** Index increase of the ordinary wave, to the power 0.55 of the concentration (1/cm³); `lambda` in m. */
export function titaniumStepOrdinary(concentration: number, lambda: number): number {
  return increase(INCREASE.ordinary, concentration, lambda);
}

type Law = typeof INCREASE[keyof typeof INCREASE];

function increase({ strength, resonance, unit, power }: Law, concentration: number, lambda: number): number {
  const squared = (lambda * 1e6) ** 2;
  return strength * squared / (squared - resonance) * (unit * concentration) ** power;
}
