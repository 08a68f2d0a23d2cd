// Pure: no I/O, no clock, no hidden randomness.
import { EigenvalueDecomposition, Matrix } from "ml-matrix";

export interface Maximum {
  readonly at: Float64Array;
  readonly value: number;
  /** Eigenvalues and eigenvectors (columns) of minus the Hessian at the maximum. */
  readonly curvature: readonly number[];
  readonly axes: Matrix;
  readonly steps: number;
  readonly converged: boolean;
}

/** Steps of the difference quotients, for arguments of order one: the gradient's is finer than the curvature's. */
const GRADIENT_STEP = 1e-4;
const CURVATURE_STEP = 2e-3;
const LONGEST_STEP = 1.5;

/**
 * Newton's method with difference quotients, the curvature made positive and the step bounded; for smooth functions of a
 * few variables whose natural scale is about one (logarithms of standard deviations).
 * @param gain the search ends when a step promises less than this
 */
export function maximise(
  f: (x: Float64Array) => number,
  start: ArrayLike<number>,
  { gain = 1e-6, most = 60 }: { gain?: number; most?: number } = {},
): Maximum {
  let at = Float64Array.from(start);
  let value = f(at);
  let steps = 0;
  let converged = at.length === 0;
  let { curvature, axes } = curve(f, at, value);
  while (!converged && steps < most) {
    steps++;
    const slope = gradient(f, at);
    const step = newtonStep(slope, curvature, axes);
    const promised = step.reduce((sum, s, i) => sum + s * slope[i]!, 0);
    converged = promised < gain;
    let share = 1;
    for (let halvings = 0; halvings < 12; halvings++, share /= 2) {
      const trial = at.map((x, i) => x + share * step[i]!);
      const found = f(trial);
      if (found >= value) {
        at = trial;
        value = found;
        break;
      }
    }
    // No part of the step gains: rounding decides from here on.
    if (share < 1e-3) converged = true;
    ({ curvature, axes } = curve(f, at, value));
  }
  return { at, value, curvature, axes, steps, converged };
}

function newtonStep(slope: Float64Array, curvature: readonly number[], axes: Matrix): Float64Array {
  const n = slope.length;
  const step = new Float64Array(n);
  for (let a = 0; a < n; a++) {
    let along = 0;
    for (let i = 0; i < n; i++) along += axes.get(i, a) * slope[i]!;
    along /= Math.max(Math.abs(curvature[a]!), 1e-3);
    for (let i = 0; i < n; i++) step[i]! += along * axes.get(i, a);
  }
  const length = Math.hypot(...step);
  return length > LONGEST_STEP ? step.map((s) => s * LONGEST_STEP / length) : step;
}

function gradient(f: (x: Float64Array) => number, at: Float64Array): Float64Array {
  return at.map((_, i) => {
    const h = GRADIENT_STEP;
    return (f(moved(at, i, h)) - f(moved(at, i, -h))) / (2 * h);
  });
}

function curve(f: (x: Float64Array) => number, at: Float64Array, value: number) {
  const n = at.length;
  if (n === 0) return { curvature: [], axes: new Matrix(0, 0) };
  const h = CURVATURE_STEP;
  const minus = new Matrix(n, n);
  const up = Array.from({ length: n }, (_, i) => f(moved(at, i, h)));
  const down = Array.from({ length: n }, (_, i) => f(moved(at, i, -h)));
  for (let i = 0; i < n; i++) {
    minus.set(i, i, -(up[i]! - 2 * value + down[i]!) / h ** 2);
    for (let j = 0; j < i; j++) {
      // Two points and the ones on the axes: as exact as four points for a third of the cost.
      const both = f(moved(moved(at, i, h), j, h)) + f(moved(moved(at, i, -h), j, -h));
      const c = -(both - up[i]! - down[i]! - up[j]! - down[j]! + 2 * value) / (2 * h ** 2);
      minus.set(i, j, c);
      minus.set(j, i, c);
    }
  }
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(minus, {
    assumeSymmetric: true,
  });
  return { curvature: realEigenvalues, axes: eigenvectorMatrix };
}

function moved(at: Float64Array, i: number, by: number): Float64Array {
  const out = Float64Array.from(at);
  out[i]! += by;
  return out;
}
