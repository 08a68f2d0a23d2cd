import assert from "node:assert/strict";
import fc from "fast-check";
import { fisherExact } from "../../../../models/decision/suspects/fisher.ts";
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

Deno.test("fisherExact() of an empty row, column or table is certain", () => {
  for (const t of [table(0, 0, 0, 0), table(0, 0, 3, 4), table(3, 0, 2, 0)]) {
    assert.deepEqual(Object.values(fisherExact(t)), [1, 1, 1, 1]);
  }
  assert.throws(() => fisherExact(table(-1, 0, 0, 0)), RangeError);
  assert.throws(() => fisherExact(table(0.5, 0, 0, 0)), RangeError);
});

function choose(n: number, k: number): number {
  let c = 1;
  for (let i = 1; i <= k; i++) c *= (n - k + i) / i;
  return c;
}
