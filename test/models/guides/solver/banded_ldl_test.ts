import assert from "node:assert/strict";
import fc from "fast-check";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { factorBand, solveBand, zeroBand } from "../../../../models/guides/solver/banded_ldl.ts";

/** A symmetric band from a list of numbers, also as a dense matrix. */
function bandOf(size: number, band: number, numbers: readonly number[], shift: number) {
  const matrix = zeroBand(size, band);
  const dense = Matrix.zeros(size, size);
  let next = 0;
  for (let j = 0; j < size; j++) {
    for (let d = 0; d <= band && j + d < size; d++) {
      const value = numbers[next++ % numbers.length]! + (d === 0 ? shift : 0);
      matrix.data[j * matrix.stride + d] = value;
      dense.set(j, j + d, value);
      dense.set(j + d, j, value);
    }
  }
  return { matrix, dense };
}

const numbers = fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: 7, maxLength: 60 });

Deno.test("a band's factors solve its equations and count its negative eigenvalues", () => {
  fc.assert(
    fc.property(
      fc.integer({ min: 1, max: 26 }),
      fc.integer({ min: 1, max: 9 }),
      numbers,
      fc.double({ min: -3, max: 3, noNaN: true }),
      (size, band, list, shift) => {
        const { matrix, dense } = bandOf(size, band, list, shift);
        const eigenvalues = new EigenvalueDecomposition(dense, { assumeSymmetric: true }).realEigenvalues;
        // Without pivoting a nearly singular leading block spoils the answer: the eigen solver looks at residuals.
        for (let k = 1; k <= size; k++) {
          const leading = new EigenvalueDecomposition(dense.subMatrix(0, k - 1, 0, k - 1), {
            assumeSymmetric: true,
          });
          fc.pre(leading.realEigenvalues.every((value) => Math.abs(value) > 1e-3));
        }
        const factors = factorBand(matrix);
        assert.equal(factors.negative, eigenvalues.filter((value) => value < 0).length);
        const x = Float64Array.from({ length: size }, (_, k) => Math.cos(k));
        const b = dense.mmul(Matrix.columnVector(Array.from(x))).to1DArray();
        const solved = solveBand(factors, Float64Array.from(b));
        solved.forEach((value, k) =>
          assert.ok(Math.abs(value - x[k]!) < 1e-5, `x[${k}] ${value} for ${x[k]}`)
        );
      },
    ),
    { numRuns: 150, seed: 7 },
  );
});

Deno.test("memory of an earlier, larger band does not leak into the next", () => {
  const list = [0.3, -0.7, 0.2, 0.9, -0.4, 0.6, 0.1];
  const first = factorBand(bandOf(25, 8, list, 4).matrix);
  const reused = zeroBand(9, 3, first.data);
  assert.equal(reused.data, first.data);
  const fresh = bandOf(9, 3, list, 4).matrix;
  reused.data.set(fresh.data.subarray(0, 9 * fresh.stride));
  const x = solveBand(factorBand(reused), new Float64Array(9).fill(1));
  const y = solveBand(factorBand(fresh), new Float64Array(9).fill(1));
  assert.deepEqual(x, y);
});
