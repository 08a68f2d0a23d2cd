import assert from "node:assert/strict";
import fc from "fast-check";
import {
  exactInterval,
  expectedYield,
  scoreInterval,
  yieldRange,
  zeroFailureSize,
} from "../../../models/decision/yields.ts";
import { assertClose } from "../../assert_close.ts";

const stats = JSON.parse(Deno.readTextFileSync("fixtures/check-values/stats.json"));

Deno.test("exactInterval() and scoreInterval() give the published limits", () => {
  // R. G. Newcombe, Stat. Med. 17, 857 (1998); NIST/SEMATECH e-Handbook 7.2.4.1; three more recomputed.
  for (const { k, n, conf, wilson, clopper_pearson } of stats.proportion_ci.values) {
    const [exact, score] = [exactInterval(k, n, conf), scoreInterval(k, n, conf)];
    assertClose(exact.low, clopper_pearson[0], { abs: 1e-6 }, `exact low of ${k}/${n}`);
    assertClose(exact.high, clopper_pearson[1], { abs: 1e-6 }, `exact high of ${k}/${n}`);
    assertClose(score.low, wilson[0], { abs: 1e-6 }, `score low of ${k}/${n}`);
    assertClose(score.high, wilson[1], { abs: 1e-6 }, `score high of ${k}/${n}`);
  }
});

Deno.test("scoreInterval() gives the published one-sided limit", () => {
  // NIST/SEMATECH e-Handbook 7.2.4.1: 26 of 200, 95 % one-sided, 0.09577: the lower end of a two-sided 90 % interval.
  assertClose(scoreInterval(26, 200, 0.9).low, stats.proportion_one_sided.wilson_lower, { abs: 1e-7 });
});

Deno.test("exactInterval() leaves the tails it promises", () => {
  // At its own limits, k or more (k or fewer) of n have probability (1 − confidence)/2; sums of the binomial written out.
  const [k, n] = [7, 19];
  const { low, high } = exactInterval(k, n, 0.9);
  const mass = (p: number, j: number) => {
    let c = 1;
    for (let i = 1; i <= j; i++) c *= (n - j + i) / i;
    return c * p ** j * (1 - p) ** (n - j);
  };
  let [above, below] = [0, 0];
  for (let j = 0; j <= n; j++) {
    if (j >= k) above += mass(low, j);
    if (j <= k) below += mass(high, j);
  }
  assertClose(above, 0.05, { rel: 1e-9 });
  assertClose(below, 0.05, { rel: 1e-9 });
});

Deno.test("limits mirror when good and bad change places, and hold the share", () => {
  fc.assert(
    fc.property(fc.integer({ min: 1, max: 400 }), fc.double({ min: 0, max: 1, noNaN: true }), (n, at) => {
      const k = Math.round(at * n);
      for (const interval of [exactInterval, scoreInterval]) {
        const [a, b] = [interval(k, n), interval(n - k, n)];
        assertClose(a.low, 1 - b.high, { abs: 1e-9 });
        assert.ok(0 <= a.low && a.low <= k / n && k / n <= a.high && a.high <= 1);
      }
    }),
  );
  assert.deepEqual([exactInterval(0, 0), scoreInterval(0, 0)], [{ low: 0, high: 1 }, { low: 0, high: 1 }]);
  for (const [k, n] of [[-1, 3], [4, 3], [1.5, 3]] as const) {
    assert.throws(() => exactInterval(k, n), RangeError);
    assert.throws(() => scoreInterval(k, n), RangeError);
  }
  assert.throws(() => exactInterval(1, 2, 1), RangeError);
});

Deno.test("zeroFailureSize() gives the published sample sizes", () => {
  for (const { conf, p, n } of stats.zero_failure_sample_size.values) {
    assert.equal(zeroFailureSize(p, conf), n);
  }
  assert.equal(zeroFailureSize(0.5, 0.75), 2); // 1 − 0.5² is exactly 0.75
  assert.throws(() => zeroFailureSize(1, 0.95), RangeError);
});

Deno.test("expectedYield() is the binomial for equal probabilities, and its spread lies between apart and together", () => {
  const p = new Float64Array(40).fill(0.9);
  const apart = expectedYield(p, Array.from({ length: 40 }, (_, k) => `${k}`));
  assertClose(apart.expected, 36, { rel: 1e-12 });
  assertClose(apart.sd, Math.sqrt(40 * 0.09), { rel: 1e-12 });
  assertClose(apart.sdTogether, apart.sd, { rel: 1e-12 });
  assertClose(expectedYield(p).sdTogether, 40 * 0.3, { rel: 1e-12 });
  const dies = expectedYield(p, Array.from({ length: 40 }, (_, k) => `${k % 4}`));
  assertClose(dies.sdTogether, Math.sqrt(4) * 10 * 0.3, { rel: 1e-12 });
  assert.throws(() => expectedYield([1.2]), RangeError);
  assert.throws(() => expectedYield([0.2], []), RangeError);
});

Deno.test("yieldRange() has the tails of the binomial", () => {
  // P(36 or more of 40 | 0.9) = 0.62902, P(40 of 40) = 0.014781: so 40 is reached by the 97.5 % but 39 holds 98.5 %.
  const { P_40_of_40_p0p9: all, P_ge_36_of_40_p0p9: most } = stats.binomial_yield;
  const p = new Float64Array(40).fill(0.9);
  assert.equal(yieldRange(p, 1 - 2 * (all - 1e-6)).high, 40);
  assert.equal(yieldRange(p, 1 - 2 * (all + 1e-6)).high, 39);
  assert.equal(yieldRange(p, 1 - 2 * (1 - most - 1e-6)).low, 35);
  assert.equal(yieldRange(p, 1 - 2 * (1 - most + 1e-6)).low, 36);
});

Deno.test("yieldRange() counts certain units as certain, and its approximation meets the exact sum", () => {
  assert.deepEqual(yieldRange([1, 1, 0, 1]), { low: 3, high: 3, exact: true });
  const many = Array.from({ length: 4001 }, (_, k) => 0.2 + 0.6 * ((k * 0.618) % 1));
  const [approximate, exact] = [yieldRange(many), yieldRange(many.slice(1))];
  assert.deepEqual([approximate.exact, exact.exact], [false, true]);
  assert.ok(Math.abs(approximate.low - exact.low) <= 2 && Math.abs(approximate.high - exact.high) <= 2);
});
