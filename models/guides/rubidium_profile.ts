// Pure: no I/O, no clock, no hidden randomness.
// Rubidium-exchanged KTP: a box sideways, a complementary error function in depth (J. D. Bierlein, A. Ferretti,
// L. H. Brixner & W. Y. Hsu, Appl. Phys. Lett. 50, 1216 (1987); from memory).
import cdf from "@stdlib/stats-base-dists-normal-cdf";
import { gradedIndex, type GradedMode, gradedMode, type GradedProfile } from "./graded_mode.ts";
import type { SeparableMode } from "./effective_index.ts";
import { slabField, slabIndex } from "./slab.ts";

/** An exchanged guide at one wavelength. Lengths in m. */
export interface ExchangedGuide {
  readonly substrate: number;
  readonly cover: number;
  readonly step: number;
  readonly depth: number;
  readonly width: number;
}

/** Complementary error function through the normal distribution: no cancellation in the tail. */
export const erfc = (x: number): number => 2 * cdf(-x * Math.SQRT2, 0, 1);

const EXTENT_IN_DEPTHS = 6;
const LATERAL_EXTENT = 12e-6;
const POINTS = 600;

const depthProfile = ({ substrate, cover, step, depth }: ExchangedGuide): GradedProfile => ({
  substrate,
  contrast: (y) => (substrate + step * erfc(y / depth)) ** 2 - substrate ** 2,
  left: { kind: "cover", index: cover },
  extent: EXTENT_IN_DEPTHS * depth,
  points: POINTS,
});

/** Effective index of the fundamental mode (depth mode first, then the exact lateral slab), or null if not guided. */
export function exchangedIndex(guide: ExchangedGuide, lambda: number): number | null {
  const core = gradedIndex(depthProfile(guide), lambda);
  return core === null ? null : slabIndex(lateralSlab(guide, core), "TE", lambda);
}

/** The same with its field, lateral part sampled from the middle outwards. */
export function exchangedMode(guide: ExchangedGuide, lambda: number): SeparableMode | null {
  const depth = gradedMode(depthProfile(guide), lambda);
  if (depth === null) return null;
  const slab = lateralSlab(guide, depth.index);
  const index = slabIndex(slab, "TE", lambda);
  if (index === null) return null;
  const field = slabField(slab, "TE", lambda, index);
  const nodes = 2 * POINTS;
  const step = LATERAL_EXTENT / nodes;
  const lateral: GradedMode = {
    index,
    step,
    field: Float64Array.from({ length: nodes }, (_, j) => field(guide.width / 2 + j * step)),
  };
  return { index, depth, lateral };
}

const lateralSlab = ({ substrate, width }: ExchangedGuide, core: number) => ({
  core,
  substrate,
  cover: substrate,
  thickness: width,
});
