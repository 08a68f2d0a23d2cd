import assert from "node:assert/strict";
import fc from "fast-check";
import { groupedYield, yieldBounds, yieldOf } from "../../../../models/decision/charts/yield_intervals.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const stats = async () => JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));

Deno.test("yieldOf() reproduces the published intervals", async () => {
  // R. G. Newcombe, Stat. Med. 17, 857 (1998), and the NIST/SEMATECH e-Handbook, 7.2.4.1 (4 of 20 at 90 %).
  for (const v of (await stats()).proportion_ci.values) {
    const found = yieldOf(v.k, v.n, v.conf);
    for (const end of [0, 1] as const) {
      const side = end === 0 ? "lo" : "hi";
      assertClose(found.wilson[side], v.wilson[end], { abs: 6e-8 }, `score ${v.k}/${v.n}`);
      assertClose(found.exact[side], v.clopper_pearson[end], { abs: 6e-8 }, `exact ${v.k}/${v.n}`);
    }
  }
});

Deno.test("yieldBounds() reproduces the one-sided limits", async () => {
  const e = (await stats()).proportion_one_sided;
  // NIST/SEMATECH e-Handbook, 7.2.4.1 prints 0.09577; 0 of 20 leaves 1 − 0.05^(1/20) (the rule of three, exactly).
  assertClose(yieldBounds(26, e.n, e.conf).wilson.lo, e.wilson_lower, { abs: 1e-8 });
  assertClose(yieldBounds(0, 20).exact.hi, 1 - 0.05 ** (1 / 20), { rel: 1e-13 });
});

Deno.test("yieldOf() exact ends leave exactly half the rest in either binomial tail", () => {
  const choose = (n: number, k: number): number => k === 0 ? 1 : choose(n - 1, k - 1) * n / k;
  const tail = (n: number, p: number, from: number, to: number) => {
    let sum = 0;
    for (let k = from; k <= to; k++) sum += choose(n, k) * p ** k * (1 - p) ** (n - k);
    return sum;
  };
  fc.assert(fc.property(fc.integer({ min: 1, max: 40 }), fc.nat(40), (n, part) => {
    const k = Math.min(n, part);
    const { lo, hi } = yieldOf(k, n).exact;
    if (k > 0) assertClose(tail(n, lo, k, n), 0.025, { rel: 1e-9 });
    if (k < n) assertClose(tail(n, hi, 0, k), 0.025, { rel: 1e-9 });
    const mirror = yieldOf(n - k, n);
    assertClose(mirror.exact.hi, 1 - lo, { abs: 1e-12 });
    assertClose(mirror.wilson.hi, 1 - yieldOf(k, n).wilson.lo, { abs: 1e-12 });
  }));
});

Deno.test("yieldOf() knows nothing of no units and refuses impossible counts", () => {
  const none = yieldOf(0, 0);
  assert.ok(Number.isNaN(none.value));
  assert.deepEqual([none.exact, none.wilson], [{ lo: 0, hi: 1 }, { lo: 0, hi: 1 }]);
  for (const [k, n] of [[3, 2], [-1, 2], [0.5, 2], [NaN, 2]] as const) {
    assert.throws(() => yieldOf(k, n), RangeError);
  }
});

Deno.test("groupedYield() covers the yield where dies share the fate of their wafer, and counting does not", () => {
  const random = randomFrom("wafers");
  const draws = 1500;
  let [grouped, score, counted] = [0, 0, 0];
  for (let k = 0; k < draws; k++) {
    const groups = Array.from({ length: 12 }, () => {
      // Wafer yields uniform over 0.5…0.9: 0.7 in the mean.
      const p = 0.5 + 0.4 * random.uniform();
      const of = 30 + random.below(20);
      let good = 0;
      for (let i = 0; i < of; i++) if (random.uniform() < p) good++;
      return { good, of };
    });
    const y = groupedYield(groups);
    if (y.exact.lo <= 0.7 && 0.7 <= y.exact.hi) grouped++;
    if (y.wilson.lo <= 0.7 && 0.7 <= y.wilson.hi) score++;
    const plain = yieldOf(y.good, y.of).exact;
    if (plain.lo <= 0.7 && 0.7 <= plain.hi) counted++;
  }
  assert.ok(grouped / draws > 0.94, `exact covers ${grouped / draws}`);
  assert.ok(score / draws > 0.93, `score covers ${score / draws}`);
  assert.ok(counted / draws < 0.8, `counting covers ${counted / draws}`);
});

Deno.test("groupedYield() of equal groups is as good as counting, of unanimous groups counts the groups", () => {
  const even = groupedYield(Array(40).fill({ good: 7, of: 10 }));
  assert.equal(even.designEffect, 1);
  // Only the Student factor of 40 groups is paid for.
  assertClose(even.effectiveUnits, 400 * (1.9659 / 2.0227) ** 2, { rel: 1e-4 });
  const perfect = groupedYield([{ good: 10, of: 10 }, { good: 30, of: 30 }, { good: 0, of: 0 }]);
  assert.deepEqual([perfect.groups, perfect.effectiveUnits, perfect.exact.hi], [2, 2, 1]);
  assertClose(perfect.exact.lo, yieldOf(2, 2).exact.lo, { rel: 1e-14 });
  const lost = groupedYield([{ good: 0, of: 10 }, { good: 0, of: 30 }]);
  assertClose(lost.exact.hi, yieldOf(0, 2).exact.hi, { rel: 1e-14 });
  // Wafers all good or all bad: each is one unit.
  const whole = groupedYield(Array.from({ length: 20 }, (_, i) => ({ good: i % 2 ? 25 : 0, of: 25 })));
  assertClose(whole.effectiveUnits, 19 * (1.9647 / 2.0930) ** 2, { rel: 1e-3 });
  assert.throws(() => groupedYield([{ good: 1, of: 2 }]), /1 groups: need at least 2/);
});
