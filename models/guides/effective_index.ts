// Pure: no I/O, no clock, no hidden randomness.
// Effective-index route for a graded guide: first the depth at every lateral place, then the lateral profile of the
// depth modes' indices. It over-estimates n_eff − n_substrate of weakly confined guides; a test states by how much.
import { splineCurvatures, splineWeights } from "./_node_axis.ts";
import { gradedIndex, type GradedMode, gradedMode } from "./graded_mode.ts";

/** A graded guide whose depth profile is the same everywhere but for one strength (a concentration, an index step). */
export interface GradedGuide {
  /** Index of the crystal. */
  readonly substrate: number;
  /** Index of what lies on it. */
  readonly cover: number;
  /** n² − substrate² at a depth (m) where the surface strength is `strength`. */
  readonly depthContrast: (strength: number, depth: number) => number;
  /** Surface strength at x (m) from the middle, even in x. */
  readonly strength: (x: number) => number;
  /** How far to solve in depth and sideways (m), and with how many steps. */
  readonly depthExtent: number;
  readonly lateralExtent: number;
  readonly points: number;
}

/** Fundamental mode as product of a depth mode (from the surface down) and a lateral one (from the middle outwards). */
export interface SeparableMode {
  readonly index: number;
  readonly depth: GradedMode;
  readonly lateral: GradedMode;
}

/** Depth-mode contrast N² − substrate² against strength, solved on a few nodes and interpolated. */
export function depthModeContrast(
  guide: GradedGuide,
  lambda: number,
  strongest: number,
  nodes = 40,
): (strength: number) => number {
  // Denser towards weak strengths, where the mode is cut off and the curve bends.
  const strengths = Float64Array.from({ length: nodes }, (_, k) => strongest * (k / (nodes - 1)) ** 1.5);
  const values = strengths.map((strength) => {
    const N = gradedIndex(depthProfile(guide, strength), lambda);
    return N === null ? 0 : N * N - guide.substrate ** 2;
  });
  const curvatures = splineCurvatures(strengths);
  return (strength) => {
    if (strength <= 0) return 0;
    const w = splineWeights(strengths, curvatures, Math.min(strength, strongest));
    let sum = 0;
    for (let k = 0; k < nodes; k++) sum += w[k]! * values[k]!;
    return Math.max(0, sum);
  };
}

/** Effective index of the fundamental mode, or null if it is not guided. `contrast` from {@link depthModeContrast}. */
export function effectiveIndex(
  guide: GradedGuide,
  lambda: number,
  contrast: (strength: number) => number,
): number | null {
  return gradedIndex(lateralProfile(guide, contrast), lambda);
}

/** The same with its field. */
export function separableMode(
  guide: GradedGuide,
  lambda: number,
  contrast: (strength: number) => number,
): SeparableMode | null {
  const depth = gradedMode(depthProfile(guide, guide.strength(0)), lambda);
  const lateral = gradedMode(lateralProfile(guide, contrast), lambda);
  return depth === null || lateral === null ? null : { index: lateral.index, depth, lateral };
}

const depthProfile = (guide: GradedGuide, strength: number) => ({
  substrate: guide.substrate,
  contrast: (depth: number) => guide.depthContrast(strength, depth),
  left: { kind: "cover", index: guide.cover } as const,
  extent: guide.depthExtent,
  points: guide.points,
});

const lateralProfile = (guide: GradedGuide, contrast: (strength: number) => number) => ({
  substrate: guide.substrate,
  contrast: (x: number) => contrast(guide.strength(x)),
  left: { kind: "symmetry" } as const,
  extent: guide.lateralExtent,
  points: guide.points,
});

/**
 * Effective area of the overlap of three separable modes on the same grids, 1/|∫∫ e_p e_s e_i|² with ∫∫ e² = 1, m².
 * @throws RangeError if the grids differ
 */
export function separableArea(p: SeparableMode, s: SeparableMode, i: SeparableMode): number {
  const lateral = overlap(p.lateral, s.lateral, i.lateral, true);
  const depth = overlap(p.depth, s.depth, i.depth, false);
  return 1 / (lateral * depth) ** 2;
}

/** ∫ abc / √(∫a² ∫b² ∫c²), trapezium rule; the whole axis if the half is mirrored. Unit 1/√m. */
function overlap(a: GradedMode, b: GradedMode, c: GradedMode, mirrored: boolean): number {
  const n = a.field.length;
  if ([b, c].some((mode) => mode.field.length !== n || mode.step !== a.step)) {
    throw new RangeError("Cannot overlap modes: found different grids, need one");
  }
  const sides = mirrored ? 2 : 1;
  const integral = (f: (j: number) => number) => {
    let sum = f(0) / 2;
    for (let j = 1; j < n; j++) sum += f(j);
    return sides * a.step * sum;
  };
  const square = (mode: GradedMode) => integral((j) => mode.field[j]! ** 2);
  return integral((j) => a.field[j]! * b.field[j]! * c.field[j]!) /
    Math.sqrt(square(a) * square(b) * square(c));
}
