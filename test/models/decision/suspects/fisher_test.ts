import assert from "node:assert/strict";
import fc from "fast-check";
import { fisherExact } from "../../../../models/decision/suspects/fisher.ts";
import { correctPValues } from "../../../../models/decision/suspects/multiple_tests.ts";
import { type Block, shuffleTest } from "../../../../models/decision/suspects/shuffle_test.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const table = (
  affectedWith: number,
  affectedWithout: number,
  unaffectedWith: number,
  unaffectedWithout: number,
) => ({
  affectedWith,
  affectedWithout,
  unaffectedWith,
  unaffectedWithout,
});

Deno.test("fisherExact() reproduces the lady tasting tea", () => {
  // R. A. Fisher, The Design of Experiments (1935), chapter 2: of 70 choices 17 have three or more right, 1 has four.
  const three = fisherExact(table(3, 1, 1, 3));
  assertClose(three.over, 17 / 70, { rel: 1e-14 });
  assertClose(three.twoSided, 34 / 70, { rel: 1e-14 }); // 0.4857
  assertClose(three.leastOver, 1 / 70, { rel: 1e-14 });
  assertClose(fisherExact(table(4, 0, 0, 4)).over, 1 / 70, { rel: 1e-14 });
});

Deno.test("fisherExact() reproduces the table of convictions of twins", () => {
  // R. A. Fisher, J. R. Stat. Soc. 98, 39 (1935): like-sex twins of criminals, 10 of 13 monozygotic and 2 of 17 dizygotic
  // convicted; exactly 619/1330665 = 0.000465 for as extreme in that direction (from memory), 0.000537 two-sided.
  const twins = fisherExact(table(10, 3, 2, 15));
  assertClose(twins.over, 619 / 1330665, { rel: 1e-12 });
  assertClose(twins.twoSided, 0.0005367, { abs: 5e-8 });
});

/** The same by listing every choice of carriers among the units. */
function listed(bad: readonly boolean[], carriers: number): Map<number, number> {
  const counts = new Map<number, number>();
  const n = bad.length;
  for (let set = 0; set < 1 << n; set++) {
    let [size, hit] = [0, 0];
    for (let i = 0; i < n; i++) {
      if (set & (1 << i)) {
        size++;
        if (bad[i]) hit++;
      }
    }
    if (size === carriers) counts.set(hit, (counts.get(hit) ?? 0) + 1);
  }
  return counts;
}

Deno.test("fisherExact() agrees with listing every arrangement of up to 12 units", () => {
  const cell = fc.nat(3);
  fc.assert(
    fc.property(cell, cell, cell, cell, (a, b, c, d) => {
      const bad = Array.from({ length: a + b + c + d }, (_, i) => i < a + b);
      const counts = listed(bad, a + c);
      const all = [...counts.values()].reduce((s, n) => s + n, 0);
      const share = (keep: (hit: number, n: number) => boolean) =>
        [...counts].reduce((s, [hit, n]) => s + (keep(hit, n) ? n : 0), 0) / all;
      const found = fisherExact(table(a, b, c, d));
      assertClose(found.over, share((hit) => hit >= a), { rel: 1e-12 });
      assertClose(found.under, share((hit) => hit <= a), { rel: 1e-12 });
      assertClose(found.twoSided, share((_, n) => n <= counts.get(a)!), { rel: 1e-12 });
      assertClose(found.leastOver, share((hit) => hit === Math.min(a + b, a + c)), { rel: 1e-12 });
    }),
    { numRuns: 60 },
  );
});

Deno.test("fisherExact() holds for large tables and far tails", () => {
  // All 500 affected carry it, no other: one arrangement of C(1000, 500) = 2.7e299.
  assertClose(fisherExact(table(500, 0, 0, 500)).over, 1 / choose(1000, 500), { rel: 1e-10 });
  // Even tables: P(X ≥ centre) = (1 + P(centre))/2 by symmetry, P(centre) = √(4/(π·n))·… ≈ 1/√(2π·v), v = n/16·n/(n − 1).
  const n = 1e5;
  const even = fisherExact(table(n / 4, n / 4, n / 4, n / 4));
  assertClose(even.over, 0.5 + 0.5 / Math.sqrt(2 * Math.PI * n / 16), { rel: 1e-5 });
  assertClose(even.over, even.under, { rel: 1e-11 });
  assert.equal(even.twoSided, 1);
});

function choose(n: number, k: number): number {
  let c = 1;
  for (let i = 1; i <= k; i++) c *= (n - k + i) / i;
  return c;
}

Deno.test("fisherExact() of an empty row, column or table is certain", () => {
  for (const t of [table(0, 0, 0, 0), table(0, 0, 3, 4), table(3, 0, 2, 0)]) {
    assert.deepEqual(Object.values(fisherExact(t)), [1, 1, 1, 1]);
  }
  assert.throws(() => fisherExact(table(-1, 0, 0, 0)), RangeError);
  assert.throws(() => fisherExact(table(0.5, 0, 0, 0)), RangeError);
});

Deno.test("shuffleTest() of single units is Fisher's one-sided test", () => {
  const cell = fc.nat(30);
  fc.assert(fc.property(cell, cell, cell, cell, (a, b, c, d) => {
    const block = (affected: number, has: boolean): Block => ({ units: 1, affected, has, stratum: "" });
    const blocks = [
      ...Array(a).fill(block(1, true)),
      ...Array(b).fill(block(1, false)),
      ...Array(c).fill(block(0, true)),
      ...Array(d).fill(block(0, false)),
    ];
    const found = shuffleTest(blocks, randomFrom(1));
    const fisher = fisherExact(table(a, b, c, d));
    assertClose(found.p, fisher.over, { rel: 1e-9 });
    assertClose(found.least, fisher.leastOver, { rel: 1e-9 });
    assert.equal(found.method, "exact");
  }));
});

Deno.test("shuffleTest() agrees with listing every dealing among blocks of any size and strata", () => {
  const block = fc.record({
    units: fc.integer({ min: 1, max: 6 }),
    bad: fc.nat(6),
    has: fc.boolean(),
    s: fc.nat(1),
  });
  fc.assert(
    fc.property(fc.array(block, { minLength: 1, maxLength: 9 }), (drawn) => {
      const blocks = drawn.map((b) => ({
        units: b.units,
        affected: Math.min(b.units, b.bad),
        has: b.has,
        stratum: `${b.s}`,
      }));
      const inStratum = (s: string) => blocks.filter((b) => b.stratum === s);
      const excess = blocks.map((b) => {
        const all = inStratum(b.stratum);
        const total = (key: "units" | "affected") => all.reduce((sum, x) => sum + x[key], 0);
        return b.affected - b.units * total("affected") / total("units");
      });
      const statistic = (has: (i: number) => boolean) =>
        excess.reduce((sum, e, i) => sum + (has(i) ? e : 0), 0);
      const carriers = (s: string, has: (i: number) => boolean) =>
        blocks.filter((b, i) => b.stratum === s && has(i)).length;
      const observed = statistic((i) => blocks[i]!.has);
      const sums: number[] = [];
      for (let set = 0; set < 1 << blocks.length; set++) {
        const has = (i: number) => (set & (1 << i)) !== 0;
        if (["0", "1"].every((s) => carriers(s, has) === carriers(s, (i) => blocks[i]!.has))) {
          sums.push(statistic(has));
        }
      }
      const greatest = Math.max(...sums);
      const found = shuffleTest(blocks, randomFrom(1));
      assertClose(found.p, sums.filter((x) => x >= observed - 1e-7).length / sums.length, { rel: 1e-10 });
      assertClose(found.least, sums.filter((x) => x >= greatest - 1e-7).length / sums.length, { rel: 1e-10 });
    }),
    { numRuns: 150 },
  );
});

Deno.test("shuffleTest() draws where listing is too long, and finds what the normal approximation says", () => {
  const random = randomFrom("blocks");
  const blocks = Array.from({ length: 120 }, (_, i): Block => {
    const units = 200 + random.below(800);
    return { units, affected: random.below(units), has: i % 3 === 0, stratum: "" };
  });
  const found = shuffleTest(blocks, randomFrom("deal"));
  assert.equal(found.method, "sampled");
  assert.deepEqual(found, shuffleTest(blocks, randomFrom("deal")));
  // Sampling without replacement: variance of the sum of k of n is k(n − k)/n·s².
  const units = blocks.reduce((s, b) => s + b.units, 0);
  const bad = blocks.reduce((s, b) => s + b.affected, 0);
  const excess = blocks.map((b) => b.affected - b.units * bad / units);
  const s2 = excess.reduce((s, e) => s + e * e, 0) / 119;
  const t = excess.reduce((s, e, i) => s + (i % 3 === 0 ? e : 0), 0);
  const z = t / Math.sqrt(40 * 80 / 120 * s2);
  const above = randomFrom("z");
  let count = 0;
  for (let i = 0; i < 40000; i++) if (above.normal() >= z) count++;
  assertClose(found.p, count / 40000, { abs: 0.02 });
});

Deno.test("correctPValues() reproduces the worked case and never blames less than Bonferroni", () => {
  // By hand: 4·0.005, 3·0.01, then 2·0.03 and the last not below it.
  const p = [0.01, 0.04, 0.03, 0.005];
  for (const [i, x] of [0.03, 0.06, 0.06, 0.02].entries()) {
    assertClose(correctPValues(p, "holm")[i]!, x, { rel: 1e-12 });
  }
  for (const [i, x] of [0.04, 0.16, 0.12, 0.02].entries()) {
    assertClose(correctPValues(p, "bonferroni")[i]!, x, { rel: 1e-12 });
  }
  assert.deepEqual(correctPValues([], "holm"), []);
  assert.throws(() => correctPValues([NaN], "holm"), RangeError);
  fc.assert(fc.property(fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 20 }), (ps) => {
    const [holm, bonferroni] = [correctPValues(ps, "holm"), correctPValues(ps, "bonferroni")];
    for (const [i, x] of ps.entries()) assert.ok(x <= holm[i]! && holm[i]! <= bonferroni[i]!);
  }));
});
