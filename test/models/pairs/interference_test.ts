import assert from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  type ComplexMatrix,
  contrastVisibility,
  dipVisibility,
  exchangeOverlap,
  heraldedState,
  maximiseOverDelay,
  purity,
  sourceOverlap,
  splitterFactor,
} from "../../../models/pairs/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { expMinus, PUBLISHED, random, sampled } from "./matrices.ts";

Deno.test("maximiseOverDelay() finds the delay of a line of equal phase steps, wherever it lies", () => {
  const step = 3e10;
  for (const tau of [0, 1.234e-12, -4.2e-11, 9e-11]) {
    const n = 101;
    const re = new Float64Array(n);
    const im = new Float64Array(n);
    for (let k = 0; k < n; k++) {
      const size = Math.exp(-(((k - 50) / 17) ** 2));
      re[k] = size * Math.cos(-k * step * tau);
      im[k] = size * Math.sin(-k * step * tau);
    }
    const best = maximiseOverDelay(re, im, step);
    assertClose(best.delay, tau, { abs: 1e-16 }, "delay");
    assertClose(best.value, re.reduce((s, _, k) => s + Math.hypot(re[k]!, im[k]!), 0), { rel: 1e-12 });
  }
});

Deno.test("exchange overlap of a double Gaussian with unlike arms has its closed form", () => {
  // ∬f f_swapped / ∬f² of exp(−ax²−by²−2cxy): √((ab−c²)/(((a+b)/2)²−c²))
  const [a, b, c] = [1, 2, 0.7];
  const m = sampled(160, 7, (x, y) => expMinus(a * x * x + b * y * y + 2 * c * x * y, 0));
  const expected = Math.sqrt((a * b - c * c) / (((a + b) / 2) ** 2 - c * c));
  const { value, delay } = exchangeOverlap(m, 14 / 160);
  assertClose(value, expected, { rel: 1e-10 });
  assertClose(delay, 0, { abs: 1e-6 });
});

Deno.test("exchange overlap of a birefringent source is near zero without delay, and 1 with it", () => {
  // walk-off: f(x, y)·e^{−iτ₀x} of a symmetric f is worst without delay and perfect at τ = τ₀
  const tau = 6;
  const n = 160;
  const step = 14 / n;
  const m = sampled(n, 7, (x, y) => expMinus((x + y) ** 2 + (x - y) ** 2 / 2, tau * x));
  const { value, delay } = exchangeOverlap(m, step);
  assertClose(value, 1, { rel: 1e-9 });
  assertClose(delay, tau, { abs: 1e-4 });
  let [re, norm] = [0, 0];
  for (let j = 0; j < n; j++) {
    for (let l = 0; l < n; l++) {
      const [p, q] = [j * n + l, l * n + j];
      re += m.re[p]! * m.re[q]! + m.im[p]! * m.im[q]!;
      norm += m.re[p]! ** 2 + m.im[p]! ** 2;
    }
  }
  assert.ok(Math.abs(re / norm) < 0.05, `without delay ${re / norm}`);
});

Deno.test("exchange overlap of arms a distance d apart falls as exp(−d²)", () => {
  // f = exp(−(x−d/2)² − (y+d/2)²): the overlap integral of each arm is exp(−d²/2), two arms
  for (const d of [0.5, 1, 2]) {
    const m = sampled(160, 7, (x, y) => expMinus((x - d / 2) ** 2 + (y + d / 2) ** 2, 0));
    assertClose(exchangeOverlap(m, 14 / 160).value, Math.exp(-d * d), { rel: 1e-9 });
  }
});

Deno.test("exchange overlap lies in 0…1 and a separable linear phase moves the delay only", () => {
  fc.assert(fc.property(fc.integer(), fc.integer({ min: 1, max: 12 }), (seed, n) => {
    const m = random(n, n, randomFrom(seed).uniform);
    const { value } = exchangeOverlap(m, 1);
    assert.ok(value >= 0 && value <= 1 + 1e-12, `${value}`);
    const re = m.re.slice();
    const im = m.im.slice();
    for (let p = 0; p < n * n; p++) {
      const phase = 0.3 * Math.floor(p / n) - 0.2 * (p % n);
      re[p] = m.re[p]! * Math.cos(phase) - m.im[p]! * Math.sin(phase);
      im[p] = m.re[p]! * Math.sin(phase) + m.im[p]! * Math.cos(phase);
    }
    assertClose(exchangeOverlap({ rows: n, cols: n, re, im }, 1).value, value, { abs: 1e-9 });
  }));
  assert.throws(() => exchangeOverlap(random(2, 3, () => 0.1), 1), /2 × 3/);
  const zero: ComplexMatrix = { rows: 1, cols: 1, re: new Float64Array(1), im: new Float64Array(1) };
  assert.deepEqual(exchangeOverlap(zero, 1), { value: 0, delay: 0 });
});

Deno.test("a filter applied inside exchangeOverlap() is the filter applied to the matrix", () => {
  const { uniform } = randomFrom("filters in the exchange");
  const n = 9;
  const m = random(n, n, uniform);
  const ts = Float64Array.from({ length: n }, uniform);
  const ti = Float64Array.from({ length: n }, uniform);
  const times = (x: Float64Array) => x.map((v, p) => v * Math.sqrt(ts[Math.floor(p / n)]! * ti[p % n]!));
  const filtered = { ...m, re: times(m.re), im: times(m.im) };
  assertClose(exchangeOverlap(m, 1, ts, ti).value, exchangeOverlap(filtered, 1).value, { rel: 1e-9 });
  const rho = heraldedState(m, ts, ti);
  assertClose(sourceOverlap(rho, rho, 1).value, purity(filtered), { rel: 1e-9 });
});

Deno.test("two equal sources dip by their purity, also when one of them is late", () => {
  const m = sampled(96, 7, (x, y) => expMinus((x + y) ** 2 / 6 + (x - y) ** 2, 0.4 * x * y));
  const rho = heraldedState(m);
  assertClose(rho.re.reduce((s, x, p) => s + (p % 97 === 0 ? x : 0), 0), 1, { rel: 1e-12 }, "trace");
  assertClose(sourceOverlap(rho, rho, 14 / 96).value, purity(m), { rel: 1e-9 });
  const late = sampled(96, 7, (x, y) => expMinus((x + y) ** 2 / 6 + (x - y) ** 2, 0.4 * x * y + 2 * x));
  const dip = sourceOverlap(rho, heraldedState(late), 14 / 96);
  assertClose(dip.value, purity(m), { rel: 1e-9 });
  assertClose(Math.abs(dip.delay), 2, { abs: 1e-4 });
});

Deno.test("pure Gaussian packets: one sigma apart 0.7788, twice as wide 0.8", () => {
  // fixtures/check-values/pairs.json, two_photon_interference
  const [offset, ratio] = PUBLISHED.two_photon_interference.pure_gaussian_overlap;
  const packet = (at: number, sigma: number) =>
    heraldedState(sampled(160, 20, (x, y) => expMinus((x - at) ** 2 / (4 * sigma * sigma) + y * y, 0)));
  const of = (at: number, sigma: number) => sourceOverlap(packet(0, 1), packet(at, sigma), 40 / 160).value;
  assertClose(of(offset.d_over_s, 1), offset.V, { abs: 1e-8 });
  assertClose(of(0, ratio.r), ratio.V, { abs: 1e-8 });
});

Deno.test("visibilities and the splitter's factor", () => {
  for (const { V, V2 } of PUBLISHED.two_photon_interference.values) {
    assertClose(contrastVisibility(V), V2, { abs: 1e-8 });
    assertClose(dipVisibility(1000, 1000 * (1 - V)), V, { rel: 1e-12 });
  }
  assert.equal(splitterFactor(0.5), 1);
  assertClose(splitterFactor(0.4), 0.48 / 0.52, { rel: 1e-12 });
  assert.equal(splitterFactor(0), 0);
  assert.throws(() => splitterFactor(1.1), RangeError);
  assert.throws(() => dipVisibility(0, 0), RangeError);
});
