import assert from "node:assert/strict";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { eigenpair, modesAbove } from "../../../../models/guides/solver/eigen.ts";
import { gridAxes, type Parity, planGrid } from "../../../../models/guides/solver/guide_grid.ts";
import {
  type FieldKind,
  type ModeMatrix,
  modeMatrix,
  timesMatrix,
} from "../../../../models/guides/solver/mode_matrix.ts";
import { titaniumSection } from "../../../../models/guides/solver/titanium_section.ts";
import { assertClose } from "../../../assert_close.ts";

// A wide guide at a short wavelength: several modes on a grid small enough for a dense decomposition.
const stripe = { width: 10e-6, titanium: 0.1e-6, lateral: 4.5e-6, depth: 4.5e-6 };
const lambda = 0.9e-6;
const section = titaniumSection(stripe, "extraordinary", lambda, 2.1663);

function matrixOf(parity: Parity, field?: FieldKind): ModeMatrix {
  const { x, y } = gridAxes(planGrid(section, lambda, parity, { x: 16, y: 24 }, 20e-6), 4);
  return modeMatrix(section, x, y, lambda, field);
}

/** All eigenvalues μ of A·f = μ·M·f by a dense symmetric decomposition, highest first. */
function dense(matrix: ModeMatrix): number[] {
  const size = matrix.mass.length;
  const full = Matrix.zeros(size, size);
  const unit = new Float64Array(size);
  for (let k = 0; k < size; k++) {
    unit.fill(0);
    unit[k] = 1;
    timesMatrix(matrix, unit, new Float64Array(size)).forEach((value, m) => {
      full.set(m, k, value / Math.sqrt(matrix.mass[m]! * matrix.mass[k]!));
    });
  }
  return new EigenvalueDecomposition(full, { assumeSymmetric: true }).realEigenvalues.sort((a, b) => b - a);
}

for (
  const [name, parity, field] of [
    ["even modes", "even", undefined],
    ["odd modes", "odd", undefined],
    ["fields across the surface", "even", { kind: "across", along: 2.24 }],
  ] as [string, Parity, FieldKind | undefined][]
) {
  Deno.test(`${name} agree with a dense decomposition of the same small grid`, () => {
    const matrix = matrixOf(parity, field);
    const all = dense(matrix);
    const guided = all.filter((mu) => mu > 0);
    assert.ok(guided.length >= 3, `found ${guided.length} modes`);
    assert.equal(modesAbove(matrix, 0), guided.length);
    guided.slice(0, 3).forEach((mu, order) => {
      const found = eigenpair(matrix, order)!;
      assertClose(found.mu, mu, { rel: 1e-9 }, `mode ${order}`);
      // A guess on either side leads to the same mode.
      for (const by of [-1e-4, 1e-4]) {
        assertClose(
          eigenpair(matrix, order, { guess: mu + by })!.mu,
          mu,
          { rel: 1e-9 },
          `mode ${order}, guessed`,
        );
      }
      // A guess at another mode is noticed.
      assertClose(eigenpair(matrix, order, { guess: all[order + 1]! + 1e-6 })!.mu, mu, { rel: 1e-9 });
    });
    assert.equal(eigenpair(matrix, guided.length), null);
  });
}

Deno.test("a mode's vector solves the equation, and modes are orthogonal", () => {
  const matrix = matrixOf("even");
  const modes = [0, 1, 2].map((order) => eigenpair(matrix, order)!);
  for (const { mu, vector } of modes) {
    const product = timesMatrix(matrix, vector, new Float64Array(vector.length));
    const worst = product.reduce((most, value, k) => {
      const miss = Math.abs(value - mu * matrix.mass[k]! * vector[k]!) / Math.sqrt(matrix.mass[k]!);
      return Math.max(most, miss);
    }, 0);
    assert.ok(worst < 1e-6, `residual ${worst}`);
  }
  const dot = (a: number, b: number) =>
    modes[a]!.vector.reduce((sum, value, k) => sum + matrix.mass[k]! * value * modes[b]!.vector[k]!, 0);
  assertClose(dot(0, 0), 1, { abs: 1e-12 });
  for (const [a, b] of [[0, 1], [0, 2], [1, 2]] as const) assertClose(dot(a, b), 0, { abs: 1e-5 });
});
