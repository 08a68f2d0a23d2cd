import assert from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import { purity, purityOfWeights, refine, schmidtNumber, schmidtWeights } from "../../../models/pairs/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { expMinus, PUBLISHED, random, sampled } from "./matrices.ts";

const sinc = (x: number) => x === 0 ? 1 : Math.sin(x) / x;

Deno.test("purity() of real double Gaussians is 2r/(1+r²)", () => {
  // closed form, recomputed by singular values in the reference: fixtures/check-values/pairs.json, double_gaussian
  for (const { r, P, K } of PUBLISHED.double_gaussian.values) {
    const c = sampled(256, 8 * r, (x, y) => expMinus((x + y) ** 2 / (4 * r * r) + (x - y) ** 2 / 4, 0));
    assertClose(purity(c), P, { abs: 1e-7 }, `r = ${r}`);
    assertClose(schmidtNumber(purity(c)), K, { rel: 1e-6 }, `r = ${r}`);
  }
});

Deno.test("purity() of complex double Gaussians follows the closed form", () => {
  for (const { a, b, c, P } of PUBLISHED.double_gaussian.general) {
    const m = sampled(192, 9, (x, y) =>
      expMinus(
        a[0] * x * x + b[0] * y * y + 2 * c[0] * x * y,
        a[1] * x * x + b[1] * y * y + 2 * c[1] * x * y,
      ));
    assertClose(purity(m), P, { abs: 1e-7 });
    const again = Math.sqrt((a[0] * b[0] - c[0] ** 2) / (a[0] * b[0] + c[1] ** 2));
    assertClose(purity(m), again, { abs: 1e-10 });
  }
});

Deno.test("purity() sees a chirped pump that the intensity hides", () => {
  for (const { q, P } of PUBLISHED.pump_chirp.values) {
    const c = sampled(256, 7, (x, y) => expMinus((x + y) ** 2 / 2 + (x - y) ** 2 / 2, -q * (x + y) ** 2 / 2));
    assertClose(purity(c), P, { abs: 1e-7 }, `q = ${q}`);
    assertClose(purity(c), 1 / Math.sqrt(1 + q * q / 4), { abs: 1e-9 }, `q = ${q}`);
  }
});

/** Windows W and 2W, extrapolated: what is cut off a sinc takes a share that goes as 1/W. */
function withoutWindow(f: (x: number, y: number) => number, step: number, half: number): number {
  const at = (w: number) => purity(sampled(Math.round(2 * w / step), w, (x, y) => [f(x, y), 0]));
  return 2 * at(2 * half) - at(half);
}

Deno.test("purity() of a Gaussian pump on a symmetric sinc meets the analytic table, all side lobes kept", () => {
  for (const { g, P } of PUBLISHED.gauss_pump_sinc_symmetric.values) {
    const f = (x: number, y: number) => Math.exp(-((x + y) ** 2) / (2 * g * g)) * sinc(x - y);
    assertClose(withoutWindow(f, g < 1 ? 0.25 : 0.6, 80), P, { abs: 3e-5 }, `g = ${g}`);
  }
});

Deno.test("purity() of a photon matched to the pump meets the analytic table", () => {
  // the other photon is bounded by the pump alone: its axis may be coarse and is not cut; sinc(x) is, and extrapolated
  for (const { g, P } of PUBLISHED.gauss_pump_sinc_one_sided.values) {
    const at = (half: number) => {
      const rows = Math.round(2 * half / 0.5);
      const reach = half + 6 * g;
      const cols = Math.ceil(2 * reach / Math.min(g / 4, 2));
      const re = new Float64Array(rows * cols);
      const from = new Int32Array(rows).fill(cols);
      const to = new Int32Array(rows);
      for (let j = 0; j < rows; j++) {
        const x = -half + (j + 0.5) * 2 * half / rows;
        for (let l = 0; l < cols; l++) {
          const y = -reach + (l + 0.5) * 2 * reach / cols;
          const value = Math.exp(-((x + y) ** 2) / (2 * g * g)) * sinc(x);
          if (Math.abs(value) < 1e-14) continue;
          re[j * cols + l] = value;
          from[j] = Math.min(from[j]!, l);
          to[j] = l + 1;
        }
        if (to[j] === 0) from[j] = 0;
      }
      return purity({ rows, cols, re, im: new Float64Array(rows * cols), from, to });
    };
    const half = (g < 5 ? 40 : 80) * Math.PI;
    assertClose(2 * at(2 * half) - at(half), P, { abs: 1e-5 }, `g = ${g}`);
  }
});

Deno.test("the main lobe alone would be all but pure: 0.989", () => {
  let highest = 0;
  for (let g = 1.2; g < 1.9; g += 0.02) {
    const f = (x: number, y: number) =>
      Math.abs(x - y) < Math.PI ? Math.exp(-((x + y) ** 2) / (2 * g * g)) * sinc(x - y) : 0;
    highest = Math.max(highest, purity(sampled(96, 8, (x, y) => [f(x, y), 0])));
  }
  assertClose(highest, 0.989, { abs: 1e-3 });
});

Deno.test("the best purity of a uniform grating depends on the window: 0.830, 0.815, 0.809", () => {
  // fixtures/check-values/pairs.json, window_effect; the limits are on τω of each arm
  for (const [half, best] of [[10, 0.83], [20, 0.815], [40, 0.809]] as const) {
    let highest = 0;
    for (let g = 1.3; g < 1.6; g += 0.02) {
      const n = Math.round(half * 4);
      const f = (x: number, y: number) => Math.exp(-((x + y) ** 2) / (2 * g * g)) * sinc(x - y);
      highest = Math.max(highest, purity(sampled(n, half, (x, y) => [f(x, y), 0])));
    }
    assertClose(highest, best, { abs: 5e-4 }, `window ±${half}`);
  }
});

Deno.test("purity() by norms and by singular values agree to 1e-10", () => {
  const { uniform } = randomFrom("purity two ways");
  for (const [rows, cols] of [[1, 1], [1, 7], [9, 1], [8, 8], [17, 12], [12, 17], [31, 33]] as const) {
    const c = random(rows, cols, uniform);
    const weights = schmidtWeights(c);
    assertClose(weights.reduce((a, b) => a + b, 0), 1, { abs: 1e-12 });
    assert.equal(weights.length, Math.min(rows, cols));
    assertClose(purity(c), purityOfWeights(weights), { rel: 1e-10 }, `${rows} × ${cols}`);
  }
  const smooth = sampled(48, 6, (x, y) => expMinus((x + y) ** 2 / 3 + (x - y) ** 2, 0.7 * x * y));
  assertClose(purity(smooth), purityOfWeights(schmidtWeights(smooth)), { rel: 1e-10 });
});

Deno.test("schmidtWeights() of a product has one weight, and the matrix may be scaled by 1e±9", () => {
  for (const s of [1e-9, 1, 1e9]) {
    const one = sampled(24, 5, (x, y) => expMinus(x * x + y * y / 2, x - 3 * y * y));
    const c = { ...one, re: one.re.map((v) => s * v), im: one.im.map((v) => s * v) };
    assertClose(schmidtWeights(c)[0]!, 1, { abs: 1e-12 });
    assertClose(purity(c), 1, { abs: 1e-12 });
  }
});

Deno.test("purity() lies in (0, 1], K >= 1, and phases and scales of one arm do not change it", () => {
  fc.assert(
    fc.property(
      fc.integer(),
      fc.integer({ min: 1, max: 9 }),
      fc.integer({ min: 1, max: 9 }),
      (seed, n, m) => {
        const { uniform } = randomFrom(seed);
        const c = random(n, m, uniform);
        const p = purity(c);
        assert.ok(p > 0 && p <= 1 && schmidtNumber(p) >= 1 && p >= 1 / Math.min(n, m) - 1e-12);
        const u = Array.from({ length: n }, () => 6.3 * uniform());
        const v = Array.from({ length: m }, () => 6.3 * uniform());
        const scale = 10 ** (18 * uniform() - 9);
        const re = c.re.slice();
        const im = c.im.slice();
        for (let j = 0; j < n; j++) {
          for (let l = 0; l < m; l++) {
            const k = j * m + l;
            const [x, y] = [scale * Math.cos(u[j]! + v[l]!), scale * Math.sin(u[j]! + v[l]!)];
            re[k] = c.re[k]! * x - c.im[k]! * y;
            im[k] = c.re[k]! * y + c.im[k]! * x;
          }
        }
        assertClose(purity({ rows: n, cols: m, re, im }), p, { rel: 1e-12 });
      },
    ),
  );
});

Deno.test("a matrix of zeros has no purity", () => {
  const zero = { rows: 2, cols: 2, re: new Float64Array(4), im: new Float64Array(4) };
  assert.throws(() => purity(zero), RangeError);
  assert.throws(() => schmidtWeights(zero), RangeError);
});

Deno.test("refine() doubles until the change is below 1e-3, and owns up when the limit comes first", () => {
  const asked: number[] = [];
  const slow = (n: number) => (asked.push(n), 1 / n);
  const change = (a: number, b: number) => Math.abs(a - b);
  const done = refine(slow, change, 64, 4096);
  assert.deepEqual(asked, [32, 64, 128, 256, 512, 1024]);
  assert.deepEqual([done.points, done.converged, done.result], [1024, true, 1 / 1024]);
  const cut = refine(slow, change, 64, 128);
  assert.deepEqual([cut.points, cut.converged, cut.change], [128, false, 1 / 128]);
  for (const n of [0, 3, 5, 7.5, NaN]) assert.throws(() => refine(slow, change, n, 512), RangeError);
  assert.throws(() => refine(slow, change, 64, 32), RangeError);
});
