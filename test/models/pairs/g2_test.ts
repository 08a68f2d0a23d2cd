import assert from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  type ComplexMatrix,
  type CorrelationTerms,
  g2Heralded,
  g2Unheralded,
  gramMoments,
  powerAtG2,
  purity,
  schmidtWeights,
} from "../../../models/pairs/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { PUBLISHED, random } from "./matrices.ts";

const ones = (n: number) => new Float64Array(n).fill(1);

/** Terms of F scaled to a mean of n̄. */
function termsOf(f: ComplexMatrix, mean: number, ts: Float64Array, ti: Float64Array): CorrelationTerms {
  let norm = 0;
  for (let k = 0; k < f.re.length; k++) norm += f.re[k]! ** 2 + f.im[k]! ** 2;
  const s = Math.sqrt(mean / norm);
  const scaled = { ...f, re: f.re.map((x) => s * x), im: f.im.map((x) => s * x) };
  let heralds = 0;
  for (let k = 0; k < f.re.length; k++) {
    heralds += ti[k % f.cols]! * (scaled.re[k]! ** 2 + scaled.im[k]! ** 2);
  }
  return { ...gramMoments(scaled, ts, ti), heralds };
}

/** Photon-number sums of one squeezed mode pair, p_n = (1−x)xⁿ, on/off herald: exact in μ. */
function singleMode(mu: number, eta: number): number {
  const x = mu / (1 + mu);
  let [clicks, first, second] = [0, 0, 0];
  for (let n = 1; n <= 400; n++) {
    const p = (1 - x) * x ** n * (1 - (1 - eta) ** n);
    clicks += p;
    first += n * p;
    second += n * (n - 1) * p;
  }
  return second * clicks / first ** 2;
}

Deno.test("the photon-number sum used here gives the published heralded g2 of one mode", () => {
  for (const { mu, eta, g2 } of PUBLISHED.g2.values) assertClose(singleMode(mu, eta), g2, { abs: 1e-8 });
});

Deno.test("g2Heralded() is the small-mean limit of the exact single-mode value", () => {
  const one: ComplexMatrix = { rows: 1, cols: 1, re: ones(1), im: new Float64Array(1) };
  for (const { mu, eta, g2 } of PUBLISHED.g2.values) {
    const low = g2Heralded(termsOf(one, mu, ones(1), ones(1)), eta);
    assertClose(low, 2 * (2 - eta) * mu, { rel: 1e-12 });
    // next order in μ: the published values lie below by less than 2μ relative
    assert.ok(g2 < low && g2 > low * (1 - 3 * mu), `${g2} against ${low}`);
    assertClose(g2Heralded(termsOf(one, 1e-6, ones(1), ones(1)), eta), singleMode(1e-6, eta), { rel: 1e-5 });
  }
});

Deno.test("without filters g2 is n̄(1+P)(2−η), and 1+P unheralded", () => {
  const { uniform } = randomFrom("g2 without filters");
  const f = random(13, 8, uniform);
  const terms = termsOf(f, 0.02, ones(13), ones(8));
  const p = purity(f);
  for (const eta of [0, 0.3, 1]) {
    assertClose(g2Heralded(terms, eta), 0.02 * (1 + p) * (2 - eta), { rel: 1e-12 });
  }
  assertClose(g2Unheralded(terms), 1 + p, { rel: 1e-12 });
  assertClose(g2Unheralded(terms), 1 + schmidtWeights(f).reduce((a, w) => a + w * w, 0), { rel: 1e-10 });
});

/**
 * Second order of perturbation, term by term: amplitudes A = F_jlF_km + F_jmF_kl of two pairs, signal photons counted
 * behind their filter, a click of either idler photon with probability 1 − (1−ηT_l)(1−ηT_m).
 */
function byTwoPairs(f: ComplexMatrix, ts: Float64Array, ti: Float64Array, eta: number): number {
  const { rows: n, cols: m } = f;
  let [two, single, clicks] = [0, 0, 0];
  const at = (j: number, l: number) => [f.re[j * m + l]!, f.im[j * m + l]!] as const;
  for (let j = 0; j < n; j++) {
    for (let l = 0; l < m; l++) {
      const square = at(j, l)[0] ** 2 + at(j, l)[1] ** 2;
      clicks += eta * ti[l]! * square;
      single += eta * ti[l]! * ts[j]! * square;
      for (let k = 0; k < n; k++) {
        for (let q = 0; q < m; q++) {
          const [a, b] = [at(j, l), at(k, q)];
          const [c, d] = [at(j, q), at(k, l)];
          const re = a[0] * b[0] - a[1] * b[1] + c[0] * d[0] - c[1] * d[1];
          const im = a[0] * b[1] + a[1] * b[0] + c[0] * d[1] + c[1] * d[0];
          const click = 1 - (1 - eta * ti[l]!) * (1 - eta * ti[q]!);
          two += 0.5 * ts[j]! * ts[k]! * (re * re + im * im) * click;
        }
      }
    }
  }
  return two * clicks / single ** 2;
}

Deno.test("g2Heralded() with filters in both arms agrees with the sum over all two-pair amplitudes", () => {
  fc.assert(
    fc.property(
      fc.integer(),
      fc.integer({ min: 1, max: 5 }),
      fc.integer({ min: 1, max: 5 }),
      (seed, n, m) => {
        const { uniform } = randomFrom(seed);
        const f = random(n, m, uniform);
        const ts = Float64Array.from({ length: n }, () => 0.01 + 0.99 * uniform());
        const ti = Float64Array.from({ length: m }, () => 0.01 + 0.99 * uniform());
        const eta = 0.05 + 0.95 * uniform();
        const mean = f.re.reduce((s, x, k) => s + x * x + f.im[k]! ** 2, 0);
        assertClose(g2Heralded(termsOf(f, mean, ts, ti), eta), byTwoPairs(f, ts, ti, eta), { rel: 1e-10 });
      },
    ),
    { numRuns: 60 },
  );
});

Deno.test("behind a narrow idler filter the herald's efficiency no longer matters", () => {
  const { uniform } = randomFrom("narrow idler filter");
  const f = random(6, 40, uniform);
  const ti = new Float64Array(40);
  ti[7] = 1e-3;
  const terms = termsOf(f, 0.01, ones(6), ti);
  assertClose(g2Heralded(terms, 1) / g2Heralded(terms, 1e-9), 1, { rel: 1e-3 });
});

Deno.test("gramMoments() equals plain matrix products, also with dark cells, blocked rows and odd sizes", () => {
  const { uniform } = randomFrom("gram");
  for (const [n, m] of [[1, 1], [4, 4], [5, 3], [7, 8], [16, 15]] as const) {
    const f = random(n, m, uniform);
    const from = new Int32Array(n);
    const to = new Int32Array(n).fill(m);
    for (let j = 0; j < n; j++) {
      from[j] = Math.floor(uniform() * m / 2);
      to[j] = from[j]! + Math.floor(uniform() * (m - from[j]! + 1));
      for (let l = 0; l < m; l++) if (l < from[j]! || l >= to[j]!) f.re[j * m + l] = f.im[j * m + l] = 0;
    }
    const ts = Float64Array.from({ length: n }, () => uniform() < 0.3 ? 0 : uniform());
    const ti = Float64Array.from({ length: m }, () => uniform() < 0.3 ? 0 : uniform());
    const expected = { trace: 0, traceFiltered: 0, square: 0, squareHalf: 0, squareFiltered: 0 };
    for (let l = 0; l < m; l++) {
      for (let q = 0; q < m; q++) {
        let [re, im] = [0, 0];
        for (let j = 0; j < n; j++) {
          const [a, b, c, d] = [f.re[j * m + l]!, f.im[j * m + l]!, f.re[j * m + q]!, f.im[j * m + q]!];
          re += ts[j]! * (a * c + b * d);
          im += ts[j]! * (a * d - b * c);
        }
        if (l === q) {
          expected.trace += re;
          expected.traceFiltered += ti[l]! * re;
        }
        expected.square += re * re + im * im;
        expected.squareHalf += ti[l]! * (re * re + im * im);
        expected.squareFiltered += ti[l]! * ti[q]! * (re * re + im * im);
      }
    }
    for (const got of [gramMoments({ ...f, from, to }, ts, ti), gramMoments(f, ts, ti)]) {
      for (const key of Object.keys(expected) as (keyof typeof expected)[]) {
        assertClose(got[key], expected[key], { rel: 1e-12, abs: 1e-15 }, `${key} of ${n} × ${m}`);
      }
    }
  }
});

Deno.test("powerAtG2() scales the power, and what cannot be computed is refused", () => {
  assertClose(powerAtG2(0.05, 0.1, 3), 1.5, { rel: 1e-15 });
  assert.throws(() => powerAtG2(0.05, 0, 3), RangeError);
  const one: ComplexMatrix = { rows: 1, cols: 1, re: ones(1), im: new Float64Array(1) };
  assert.throws(() => g2Heralded(termsOf(one, 0.1, ones(1), ones(1)), 1.1), /η = 1.1/);
  assert.throws(() => g2Heralded(termsOf(one, 0.1, ones(1), new Float64Array(1)), 0.5), /behind the filters/);
});
