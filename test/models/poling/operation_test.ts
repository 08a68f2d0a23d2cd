import { deepStrictEqual, strictEqual, throws } from "node:assert/strict";
import fc from "fast-check";
import { phaseMatchingTemperatures } from "../../../models/poling/mod.ts";
import { assertClose } from "../../assert_close.ts";

const vector = 2 * Math.PI / 20e-6;
const k = () => vector;
const oven: [number, number] = [20, 120];

/** Roots within 2e-6 °C of the expected ones. */
function sameRoots(found: number[], expected: number[]): void {
  strictEqual(found.length, expected.length, `roots ${found}, expected ${expected}`);
  expected.forEach((t, n) => assertClose(found[n]!, t, { abs: 2e-6 }, `root ${n}`));
}

Deno.test("phaseMatchingTemperatures() finds the root of |Δβ| = K for either sign of Δβ", () => {
  for (const sign of [1, -1]) {
    const found = phaseMatchingTemperatures((t) => sign * (vector + 40 * (t - 61.234567)), k, oven);
    sameRoots(found.roots, [61.234567]);
    strictEqual(found.nearest, found.roots[0]);
  }
});

Deno.test("phaseMatchingTemperatures() follows a grating vector that shrinks with temperature", () => {
  // Δβ = K0 + 30(T − 25), K = K0(1 − 1e-4(T − 25) ): together 0 only at 25 °C; offset −600 moves it.
  const found = phaseMatchingTemperatures(
    (t) => vector + 30 * (t - 25) - 600,
    (t) => vector * (1 - 1e-4 * (t - 25)),
    oven,
  );
  sameRoots(found.roots, [25 + 600 / (30 + 1e-4 * vector)]);
});

Deno.test("phaseMatchingTemperatures() finds all roots of any parabola, however close, wherever they lie", () => {
  const root = fc.double({ min: 20.001, max: 119.999, noNaN: true });
  fc.assert(
    fc.property(root, root, fc.constantFrom(1, -1), fc.constantFrom(1, -1), (a, b, sign, bend) => {
      fc.pre(Math.abs(a - b) > 0.01);
      const f = (t: number) => sign * (vector + bend * (t - a) * (t - b));
      sameRoots(phaseMatchingTemperatures(f, k, oven).roots, [Math.min(a, b), Math.max(a, b)]);
    }),
    { numRuns: 300, seed: 5 },
  );
});

Deno.test("phaseMatchingTemperatures() finds a tangent point as one root, to what a tangent allows", () => {
  for (const at of [20.5, 47.123, 119.2]) {
    for (const bend of [3, -3]) {
      const { roots } = phaseMatchingTemperatures((t) => vector + bend * (t - at) ** 2, k, oven);
      strictEqual(roots.length, 1);
      assertClose(roots[0]!, at, { abs: 2e-3 });
    }
  }
});

Deno.test("phaseMatchingTemperatures() counts roots at the edges of the range", () => {
  sameRoots(phaseMatchingTemperatures((t) => vector + 5 * (t - 20) * (t - 120), k, oven).roots, [20, 120]);
});

Deno.test("phaseMatchingTemperatures() without a root gives the nearest temperature", () => {
  const cases: [(t: number) => number, number][] = [
    [(t) => vector + 40 * (t - 130), 120],
    [(t) => vector + 40 * (t - 10), 20],
    [(t) => vector + 5 + 2 * (t - 77.7) ** 2, 77.7],
    [(t) => -vector - 5 - 2 * (t - 20.9) ** 2, 20.9],
  ];
  for (const [mismatch, nearest] of cases) {
    const found = phaseMatchingTemperatures(mismatch, k, oven);
    deepStrictEqual(found.roots, []);
    assertClose(found.nearest, nearest, { abs: 1e-3 });
  }
});

Deno.test("phaseMatchingTemperatures() is not misled where Δβ passes through zero", () => {
  // |Δβ| has its kink at 70 °C; both roots are real.
  const found = phaseMatchingTemperatures((t) => vector * (t - 70) / 30, k, oven);
  sameRoots(found.roots, [40, 100]);
});

Deno.test("phaseMatchingTemperatures() refuses an empty range and a function that is not finite", () => {
  throws(() => phaseMatchingTemperatures(() => 1, k, [20, 20]), RangeError);
  throws(() => phaseMatchingTemperatures(() => 1, k, [90, 20]), RangeError);
  throws(() => phaseMatchingTemperatures(() => NaN, k, oven), /found NaN at 20/);
});
