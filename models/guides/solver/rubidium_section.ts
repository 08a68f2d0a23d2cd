// Pure: no I/O, no clock, no hidden randomness.
// Rubidium-exchanged guide → cross-section for the solver: a box sideways, a complementary error function in depth.
import { USUAL_STEP } from "../rubidium_constants.ts";
import { erfc, type ExchangedGuide } from "../rubidium_profile.ts";
import type { Polarisation } from "../../../shared/vocabulary.ts";
import { coveredContrast, type GuideSection } from "./cross_section.ts";

/**
 * Cross-section of an exchanged guide, whose step and substrate index are those of one wavelength.
 * @throws RangeError unless width, depth and step are positive
 */
export function rubidiumSection(guide: ExchangedGuide): GuideSection {
  const { substrate, cover, step, depth, width } = guide;
  for (const [name, value] of Object.entries({ step, depth, width })) {
    if (!(value > 0 && value < Infinity)) {
      throw new RangeError(`Cannot exchange a guide: found ${name} ${value}, need more than 0`);
    }
  }
  const half = width / 2;
  return {
    substrate,
    cover,
    contrast: coveredContrast(
      substrate,
      cover,
      (amount) => step * amount,
      (x) => Math.abs(x) < half ? 1 : 0,
      (y) => erfc(y / depth),
    ),
    edges: [half],
    scaleX: half,
    scaleY: depth / 2,
  };
}

/** A sentence for an index step of a polarisation that is not a usual one; none otherwise. */
export function rubidiumRemarks(step: number, pol: Polarisation): string[] {
  const [from, to] = USUAL_STEP;
  return step >= from && step <= to ? [] : [
    `beyond_published_range: index step ${step} for ${pol} (${from} to ${to} are usual of rubidium-exchanged KTP, from memory)`,
  ];
}
