// Pure: no I/O, no clock, no hidden randomness.
import { Matrix, SingularValueDecomposition } from "ml-matrix";
import { type ComplexMatrix, gramMoments, type GramScratch } from "./gram.ts";

/**
 * Purity P = ‖CC†‖²/‖C‖⁴ (Frobenius norms) of the reduced state of a joint amplitude matrix, 1/K of C. K. Law,
 * I. A. Walmsley & J. H. Eberly, Phys. Rev. Lett. 84, 5304 (2000). Elements are amplitude × √(cell area).
 * @throws RangeError if the matrix is 0
 */
export function purity(c: ComplexMatrix, scratch?: GramScratch): number {
  const moments = gramMoments(c, ones(c.rows), ones(c.cols), scratch);
  return ratio(moments.square, moments.trace);
}

/**
 * Schmidt weights λ_k² by singular values, descending, sum 1. Slow (a dense decomposition of the real matrix
 * [[A, −B], [B, A]] that stands for A + iB, in which every singular value appears twice): for modes and for tests.
 * @throws RangeError if the matrix is 0
 */
export function schmidtWeights(c: ComplexMatrix): Float64Array {
  const { rows, cols } = c;
  const real = new Matrix(2 * rows, 2 * cols);
  for (let j = 0; j < rows; j++) {
    for (let l = 0; l < cols; l++) {
      const a = c.re[j * cols + l]!;
      const b = c.im[j * cols + l]!;
      real.set(j, l, a);
      real.set(j, cols + l, -b);
      real.set(rows + j, l, b);
      real.set(rows + j, cols + l, a);
    }
  }
  const options = {
    computeLeftSingularVectors: false,
    computeRightSingularVectors: false,
    autoTranspose: true,
  };
  const values = new SingularValueDecomposition(real, options).diagonal.toSorted((x, y) => y - x);
  const weights = Float64Array.from({ length: Math.min(rows, cols) }, (_, k) => values[2 * k]! ** 2);
  const sum = weights.reduce((x, y) => x + y, 0);
  if (!(sum > 0)) throw new RangeError("Cannot decompose a joint amplitude: found only zeros");
  return weights.map((w) => w / sum);
}

/** Purity Σλ_k⁴ of normalised Schmidt weights λ_k². */
export const purityOfWeights = (weights: ArrayLike<number>): number =>
  Array.from(weights).reduce((sum, w) => sum + w * w, 0);

/** Schmidt number K = 1/P. */
export const schmidtNumber = (purityValue: number): number => 1 / purityValue;

/** Σ|G|²/(Tr G)², kept within 0 … 1 against rounding. @throws RangeError for a trace that is not positive */
export function ratio(square: number, trace: number): number {
  if (!(trace > 0)) throw new RangeError(`Cannot take a purity: found norm ${trace}, need a number > 0`);
  return Math.min(square / (trace * trace), 1);
}

/** A figure that was computed on finer and finer grids. */
export interface Refined<T> {
  readonly result: T;
  /** The result before the last, on half as many points. */
  readonly coarse: T;
  readonly points: number;
  /** Change of the figures in the last doubling (NaN after a single grid). */
  readonly change: number;
  readonly converged: boolean;
}

/** Largest change in one doubling of the grid that counts as converged. */
export const GRID_TOLERANCE = 1e-3;

/**
 * Doubles the grid until no figure changes by 1e-3 or more, or the limit is reached. The first comparison is with
 * half of `points`, which costs little.
 * @param compute result on a grid of so many points per arm
 * @param change between two results
 * @throws RangeError if points is not an even integer >= 4, or the limit is below it
 */
export function refine<T>(
  compute: (points: number) => T,
  change: (coarse: T, fine: T) => number,
  points: number,
  limit: number,
): Refined<T> {
  if (!Number.isSafeInteger(points / 2) || points < 4 || !(limit >= points)) {
    throw new RangeError(
      `Cannot refine from ${points} to ${limit} points: need an even number >= 4 and limit >= it`,
    );
  }
  let coarse = compute(points / 2);
  for (let n = points;; n *= 2) {
    const result = compute(n);
    const moved = change(coarse, result);
    if (moved < GRID_TOLERANCE || 2 * n > limit) {
      return { result, coarse, points: n, change: moved, converged: moved < GRID_TOLERANCE };
    }
    coarse = result;
  }
}

const ones = (n: number): Float64Array => new Float64Array(n).fill(1);
