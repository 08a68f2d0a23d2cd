import assert from "node:assert/strict";
import fc from "fast-check";
import { fisherExact } from "../../../../models/decision/suspects/fisher.ts";
import { type Block, shuffleTest } from "../../../../models/decision/suspects/shuffle.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

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
    const fisher = fisherExact({
      affectedWith: a,
      affectedWithout: b,
      unaffectedWith: c,
      unaffectedWithout: d,
    });
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
