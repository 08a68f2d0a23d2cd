import assert from "node:assert/strict";
import { fQuantile, fTail, normalTwoSided, tFactor, tTwoSided } from "../../../models/decision/tails.ts";
import { assertClose } from "../../assert_close.ts";

Deno.test("fTail() and fQuantile() reproduce the tables of F", async () => {
  const { dyestuff, gum_h5 } =
    JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json")).one_way_random;
  assertClose(fTail(dyestuff.F, 5, 24), dyestuff.p, { abs: 5e-9 });
  // JCGM 100:2008, H.5 prints 2.12 and 2.45 for 9 and 40 degrees of freedom.
  assertClose(fQuantile(0.95, 9, 40), gum_h5.F_95_9_40, { abs: 1e-8 });
  assertClose(fQuantile(0.975, 9, 40), gum_h5.F_975_9_40, { abs: 1e-8 });
  for (const p of [1e-6, 0.1, 0.5, 0.9, 0.999999]) {
    assertClose(fTail(fQuantile(p, 3, 7.5), 3, 7.5), 1 - p, { rel: 1e-9, abs: 1e-15 }, `${p}`);
  }
});

Deno.test("fTail() keeps its digits far out", () => {
  // Two degrees of freedom above: P(F > f) = (1 + 2f/d)^(−d/2) exactly.
  for (const f of [0.1, 10, 1e4]) assertClose(fTail(f, 2, 30), (1 + 2 * f / 30) ** -15, { rel: 1e-11 });
  assert.deepEqual([fTail(0, 2, 3), fTail(-1, 2, 3), fTail(Infinity, 2, 3)], [1, 1, 0]);
  assert.ok(Number.isNaN(fTail(NaN, 2, 3)));
});

Deno.test("tTwoSided() and tFactor() reproduce closed forms and the table of Student", () => {
  // One degree of freedom is Cauchy's distribution; of two P = 1 − t/√(t² + 2).
  assertClose(tTwoSided(3, 1), 1 - 2 / Math.PI * Math.atan(3), { rel: 1e-12 });
  assertClose(tTwoSided(-3, 2), 1 - 3 / Math.sqrt(11), { rel: 1e-12 });
  // JCGM 100:2008, table G.2: 2.92 for 99 % and 16 degrees of freedom.
  assertClose(tFactor(0.99, 16), 2.92078162, { abs: 1e-8 });
  assertClose(tFactor(0.95, 1e9), 1.959963985, { rel: 1e-7 });
});

Deno.test("normalTwoSided() is even, and 5 % at 1.96", () => {
  assertClose(normalTwoSided(1.959963985), 0.05, { abs: 1e-10 });
  assert.equal(normalTwoSided(-2), normalTwoSided(2));
  assertClose(normalTwoSided(10), 1.523970604832e-23, { rel: 1e-10 });
});
