// Pure: no I/O, no clock, no hidden randomness.
// Titanium stripe → cross-section for the solver; and diffusion lengths from time and temperature.
import { DIFFUSIVITY, INCREASE_RANGE } from "../titanium_constants.ts";
import {
  surfaceConcentration,
  titaniumStepExtraordinary,
  titaniumStepOrdinary,
  type TitaniumStripe,
} from "../titanium_profile.ts";
import { coveredContrast, type GuideSection } from "./cross_section.ts";

/** Index of the wave's crystal axis: `extraordinary` (along z) or `ordinary`. */
export type Wave = "ordinary" | "extraordinary";

/**
 * Cross-section of a diffused stripe at a vacuum wavelength (m). `substrate`: index of the crystal there.
 * @throws RangeError unless all lengths are positive
 */
export function titaniumSection(
  stripe: TitaniumStripe,
  wave: Wave,
  lambda: number,
  substrate: number,
  cover = 1,
): GuideSection {
  for (const [name, length] of Object.entries(stripe)) {
    if (!(length > 0 && length < Infinity)) {
      throw new RangeError(`Cannot diffuse a titanium stripe: found ${name} ${length} m, need more than 0`);
    }
  }
  const step = wave === "extraordinary" ? titaniumStepExtraordinary : titaniumStepOrdinary;
  const { depth, lateral, width } = stripe;
  return {
    substrate,
    cover,
    contrast: coveredContrast(
      substrate,
      cover,
      (concentration) => step(concentration, lambda),
      (x) => surfaceConcentration(stripe, x),
      (y) => Math.exp(-((y / depth) ** 2)),
    ),
    edges: [],
    scaleX: width / 4 + lateral / 2,
    scaleY: 0.7 * depth,
  };
}

/**
 * Diffusion length 2√(Dt) in m after `hours` at `temperatureC`, from constants of the literature that are known from
 * memory only: an order of magnitude for a process whose lengths nobody measured.
 * @throws RangeError unless time and temperature are positive
 */
export function titaniumDiffusionLength(hours: number, temperatureC: number): number {
  const kelvin = temperatureC + 273.15;
  if (!(hours > 0 && kelvin > 0 && hours < Infinity && kelvin < Infinity)) {
    throw new RangeError(
      `Cannot diffuse: found ${hours} h at ${temperatureC} °C, need more than 0 h and 0 K`,
    );
  }
  return 2e-6 * Math.sqrt(DIFFUSIVITY.factor_um2_h * Math.exp(-DIFFUSIVITY.activation_k / kelvin) * hours);
}

/** Sentences for what lies beyond the range in which the law of the index increase was published; none inside. */
export function titaniumRemarks(stripe: TitaniumStripe, lambda: number): string[] {
  const [from, to] = INCREASE_RANGE.lambda_um;
  const um = lambda * 1e6;
  const remarks: string[] = [];
  if (um < from * (1 - 1e-9) || um > to * (1 + 1e-9)) {
    remarks.push(
      `beyond_published_range: index increase of titanium at ${
        Number((um * 1000).toFixed(3))
      } nm (law published for ${from} to ${to} µm: Strake, Bava & Montrosset (1988), range from memory)`,
    );
  }
  const surface = surfaceConcentration(stripe, 0);
  const highest = INCREASE_RANGE.highestConcentration;
  if (surface > highest) {
    remarks.push(
      `beyond_published_range: titanium at the surface ${
        surface.toExponential(2)
      } per cm³ (law published up to ${
        highest.toExponential(1)
      }: Strake, Bava & Montrosset (1988), range from memory)`,
    );
  }
  return remarks;
}

/** The same for a diffusion temperature, °C. */
export function diffusionRemarks(temperatureC: number): string[] {
  const [from, to] = DIFFUSIVITY.published_c;
  return temperatureC >= from && temperatureC <= to ? [] : [
    `beyond_published_range: diffusion at ${temperatureC} °C (diffusivity of titanium given for ${from} to ${to} °C, from memory)`,
  ];
}
