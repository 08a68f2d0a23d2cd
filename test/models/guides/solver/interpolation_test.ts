import assert from "node:assert/strict";
import fc from "fast-check";
import { gradedNodes, nodeWeights } from "../../../../models/guides/solver/axis.ts";
import {
  chebyshevCoefficients,
  chebyshevDerivative,
  chebyshevNodes,
  chebyshevSum,
} from "../../../../models/guides/solver/chebyshev.ts";
import { lagrangeWeights, polynomialWeights } from "../../../../models/guides/solver/polynomial_weights.ts";
import { fieldAt } from "../../../../models/guides/solver/resample.ts";
import { assertClose } from "../../../assert_close.ts";

Deno.test("a Chebyshev series through few nodes holds a smooth function and its slope", () => {
  const [lo, hi] = [0.7, 1.75];
  const f = (x: number) => Math.exp(-3 * x) / x;
  const slope = (x: number) => -f(x) * (3 + 1 / x);
  const nodes = chebyshevNodes(lo, hi, 14);
  const c = chebyshevCoefficients(nodes.map(f));
  const d = chebyshevDerivative(c);
  for (const x of [0.7, 0.71, 0.9, 1.234, 1.6, 1.749, 1.75]) {
    const t = (2 * x - lo - hi) / (hi - lo);
    assertClose(chebyshevSum(c, t), f(x), { abs: 1e-8 });
    assertClose(chebyshevSum(d, t) * 2 / (hi - lo), slope(x), { abs: 1e-6 });
  }
  // A part of a longer list gives the same sum.
  const longer = Float64Array.from([9, 9, ...c, 9]);
  assert.equal(chebyshevSum(longer, 0.3, 2, c.length), chebyshevSum(c, 0.3));
});

Deno.test("polynomial weights reproduce polynomials and their slopes", () => {
  fc.assert(fc.property(
    fc.array(fc.double({ min: -2, max: 2, noNaN: true }), { minLength: 5, maxLength: 5 }),
    fc.double({ min: -1, max: 1, noNaN: true }),
    (a, x) => {
      const nodes = chebyshevNodes(-1, 1, 5);
      const p = (s: number) => a.reduce((sum, k, m) => sum + k * s ** m, 0);
      const dp = a.slice(1).reduce((sum, k, m) => sum + k * (m + 1) * x ** m, 0);
      const through = (derivative: 0 | 1) =>
        lagrangeWeights(nodes, x, derivative, new Float64Array(5)).reduce(
          (sum, w, k) => sum + w * p(nodes[k]!),
          0,
        );
      assertClose(through(0), p(x), { abs: 1e-12 });
      assertClose(through(1), dp, { abs: 1e-11 });
    },
  ));
});

Deno.test("weights of a grid run with the last parameter fastest and take the middle where nothing is stated", () => {
  const axes = [Float64Array.of(6, 7, 8), Float64Array.of(90, 100, 110)];
  const weights = polynomialWeights(
    ["width_um", "titanium_nm"],
    axes,
    { width_um: 8 },
    { titanium_nm: 100 },
    null,
  );
  assert.deepEqual(Array.from(weights, (w) => Math.abs(Math.round(w))), [0, 0, 0, 0, 0, 0, 0, 1, 0]);
  assert.throws(
    () => polynomialWeights(["width_um", "titanium_nm"], axes, { width_um: 8, titanium_nm: 120 }, {}, null),
    /found titanium_nm 120, need 90 to 110/,
  );
});

Deno.test("every refinement halves the cells of a graded axis and keeps its nodes", () => {
  const segments = [
    { dense: 0, far: -1, cells: 3, scale: 0.2 },
    { dense: 0, far: 2, cells: 4, scale: Infinity },
    { dense: 2, far: 30, cells: 5, scale: 1.5 },
  ];
  const coarse = gradedNodes(segments);
  const fine = gradedNodes(segments, 2);
  assert.equal(coarse.length, 13);
  assert.equal(fine.length, 25);
  coarse.forEach((x, k) => assertClose(fine[2 * k]!, x, { abs: 1e-14 }));
  for (let k = 1; k < fine.length; k++) assert.ok(fine[k]! > fine[k - 1]!);
  assertClose(nodeWeights(fine).reduce((sum, w) => sum + w, 0), 31, { rel: 1e-14 });
  assert.throws(() => gradedNodes([segments[0]!, segments[2]!]), /Cannot join segments: found 0 m and 2 m/);
  assert.throws(() => gradedNodes([{ dense: 0, far: 1, cells: 0, scale: 1 }]), /found 0 cells/);
});

Deno.test("a field between its nodes is that of a cubic, mirrored at the middle and 0 beyond the grid", () => {
  const x = gradedNodes([{ dense: 0, far: 4, cells: 8, scale: 1 }]);
  const y = gradedNodes([{ dense: -1, far: 5, cells: 9, scale: 2 }]);
  const f = (a: number, b: number) => (3 + a * a) * (1 - 0.2 * b + 0.1 * b ** 3);
  const field = Float64Array.from(
    { length: x.length * y.length },
    (_, k) => f(x[k % x.length]!, y[Math.floor(k / x.length)]!),
  );
  const mode = { x, y, parity: "even", field } as const;
  for (const [a, b] of [[0.03, -0.9], [1.7, 2.2], [3.9, 4.9], [-1.7, 2.2], [0, 0]] as const) {
    assertClose(fieldAt(mode, a, b), f(a, b), { rel: 1e-12 });
  }
  assert.equal(fieldAt(mode, 4.1, 0), 0);
  assert.equal(fieldAt(mode, 0, 5.1), 0);
});
