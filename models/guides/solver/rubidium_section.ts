// Pure: no I/O, no clock, no hidden randomness.
// Rubidium-exchanged guide → cross-section for the solver: a box sideways, a complementary error function in depth.
import { erfc, type ExchangedGuide } from "../rubidium_profile.ts";
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
