// Pure: no I/O, no clock, no hidden randomness.
import { levenbergMarquardt } from "ml-levenberg-marquardt";
import { CholeskyDecomposition, Matrix } from "ml-matrix";
import { HALF_MAXIMUM, sincSquared } from "./_sinc.ts";

/** offset + scale·sinc²(2·1.391557·(x − centre)/width), x in −1…1 and heights near 1. */
export type SincParameters = readonly [centre: number, width: number, scale: number, offset: number];

export interface SincFit {
  readonly parameters: SincParameters;
  /** Diagonal of (JᵀWJ)⁻¹: times the variance of weight 1 it is the variance of each parameter. */
  readonly variance: readonly number[];
  readonly residual: Float64Array;
  readonly weightedSquares: number;
  /** Another Gauss–Newton step is small beside the uncertainties, or beside the parameters' own digits. */
  readonly settled: boolean;
}

const ROUNDS = 5;
const STEPS_PER_ROUND = 12;

/** Weighted least squares by Levenberg–Marquardt from a start; null where the parameters cannot be told apart. */
export function fitSinc(
  x: Float64Array,
  y: Float64Array,
  w: Float64Array,
  start: SincParameters,
): SincFit | null {
  let parameters = start;
  // The library has no test for being at the minimum: short rounds, and a test of our own between them.
  for (let round = 1;; round++) {
    parameters = refine(x, y, w, parameters);
    const fit = stateAt(x, y, w, parameters);
    if (fit === null || fit.settled || round === ROUNDS) return fit;
  }
}

function stateAt(
  x: Float64Array,
  y: Float64Array,
  w: Float64Array,
  parameters: SincParameters,
): SincFit | null {
  const n = x.length;
  const jacobian = new Matrix(n, 4);
  const residual = new Float64Array(n);
  const weighted = new Float64Array(n);
  let weightedSquares = 0;
  for (let k = 0; k < n; k++) {
    const root = Math.sqrt(w[k]!);
    jacobian.setRow(k, gradient(parameters, x[k]!).map((g) => g * root));
    residual[k] = y[k]! - model(parameters, x[k]!);
    weighted[k] = residual[k]! * root;
    weightedSquares += weighted[k]! ** 2;
  }
  const transposed = jacobian.transpose();
  const normal = new CholeskyDecomposition(transposed.mmul(jacobian));
  if (!normal.isPositiveDefinite()) return null;
  const variance = normal.solve(Matrix.eye(4)).diagonal();
  const remaining = normal.solve(transposed.mmul(Matrix.columnVector(weighted))).to1DArray();
  if (!variance.every((v) => v > 0 && v < Infinity)) return null;
  const unit = weightedSquares / Math.max(1, n - 4);
  const [, width, scale] = parameters;
  const settled = [width, width, scale, scale].every((size, k) =>
    Math.abs(remaining[k]!) <= 1e-3 * Math.sqrt(variance[k]! * unit) + 1e-9 * size
  );
  return { parameters, variance, residual, weightedSquares, settled };
}

function model([centre, width, scale, offset]: SincParameters, x: number): number {
  return offset + scale * sincSquared(2 * HALF_MAXIMUM * (x - centre) / width)[0];
}

function gradient([centre, width, scale]: SincParameters, x: number): number[] {
  const v = 2 * HALF_MAXIMUM * (x - centre) / width;
  const [value, slope] = sincSquared(v);
  return [-scale * slope * 2 * HALF_MAXIMUM / width, -scale * slope * v / width, value, 1];
}

function refine(x: Float64Array, y: Float64Array, w: Float64Array, start: SincParameters): SincParameters {
  const fit = levenbergMarquardt({ x, y }, (p) => {
    const at = p as unknown as SincParameters;
    return (one) => model(at, one);
  }, {
    initialValues: start,
    jacobianFunction: (p) => {
      const at = p as unknown as SincParameters;
      return (one) => gradient(at, one);
    },
    weights: w.map(Math.sqrt), // the library squares them
    damping: 1e-3,
    maxIterations: STEPS_PER_ROUND,
    errorTolerance: 1e-28, // it stops only at a sum of squares below this: here at rounding
    minValues: [-3, 1e-6, 0, -10],
    maxValues: [3, 20, 100, 10],
  });
  return fit.parameterValues as unknown as SincParameters;
}
