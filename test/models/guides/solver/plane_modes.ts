// Cross-sections with closed forms, for the tests beside this file: lengths in units of the problem, k0 = 1.
import { type AxisEnd, gradedNodes, type Segment } from "../../../../models/guides/solver/axis.ts";
import { eigenpair } from "../../../../models/guides/solver/eigen.ts";
import { type FieldKind, modeMatrix } from "../../../../models/guides/solver/mode_matrix.ts";
import { extrapolated } from "../../../../models/guides/solver/solve_guide.ts";

/** λ = 2π, so that k0 = 1. */
export const LAMBDA = 2 * Math.PI;

export interface PlannedAxis {
  readonly segments: readonly Segment[];
  readonly low: AxisEnd;
  readonly high: AxisEnd;
}

/** Uniform in x: two nodes between mirrors, so near that no mode varies between them. */
export const UNIFORM: PlannedAxis = {
  segments: [{ dense: 0, far: 0.01, cells: 1, scale: Infinity }],
  low: "mirror",
  high: "mirror",
};

/** N² − substrate² of a mode on three nested grids, extrapolated; null if it is not guided. */
export function solvedMu(
  substrate: number,
  contrast: (x: number, y: number) => number,
  x: PlannedAxis,
  y: PlannedAxis,
  order = 0,
  field?: FieldKind,
): number | null {
  const onGrid = (refine: number) => {
    const axis = (planned: PlannedAxis, by: number) => ({
      nodes: gradedNodes(planned.segments, by),
      low: planned.low,
      high: planned.high,
    });
    const section = {
      substrate,
      contrast: (xs: Float64Array, ys: Float64Array) => {
        const out = new Float64Array(xs.length * ys.length);
        ys.forEach((b, j) => xs.forEach((a, i) => out[j * xs.length + i] = contrast(a, b)));
        return out;
      },
    };
    const matrix = modeMatrix(section, axis(x, x === UNIFORM ? 1 : refine), axis(y, refine), LAMBDA, field);
    return eigenpair(matrix, order)?.mu ?? null;
  };
  const fine = onGrid(4);
  return fine === null ? null : extrapolated(onGrid(1), onGrid(2), fine).mu;
}
