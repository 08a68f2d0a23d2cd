import assert from "node:assert/strict";
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import { conformity, decide, meets, summarise } from "../../../models/decision/conformity.ts";
import { drawTrait, nestedStrata } from "../../../models/decision/draws.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

Deno.test("meets() reproduces the probability of conformity of the Zener diode example", () => {
  // JCGM 106:2012, example of 7.4: y = −5.47 V, u = 0.05 V, upper limit −5.40 V, p = 0.92 (from memory, recomputed 0.9192433).
  const y = drawTrait({ value: -5.47, u: 0.05 }, {}, nestedStrata(65536, 16, randomFrom("zener")));
  const share = meets(y, { atLeast: -Infinity, atMost: -5.4 }).reduce((s, x) => s + x, 0) / y.length;
  assertClose(share, 0.9192433, { abs: 1e-4 });
  assertClose(normalCdf((-5.4 + 5.47) / 0.05, 0, 1), 0.9192433, { abs: 1e-7 });
});

Deno.test("summarise() propagates the sum of four normals", () => {
  // JCGM 101:2008, 9.2.2: four standard normals sum to u = 2 and a 95 % interval of ±3.92 (from memory, exact by theory).
  const n = 65536;
  const parts = [0, 1, 2, 3].map((i) =>
    drawTrait({ value: 0, u: 1 }, {}, nestedStrata(n, 16, randomFrom(i + 1)))
  );
  const s = summarise(parts[0]!.map((_, k) => parts.reduce((sum, p) => sum + p[k]!, 0)))!;
  assertClose(s.u, 2, { rel: 0.01 });
  assertClose(s.lo, -3.919928, { rel: 0.02 });
  assertClose(s.hi, 3.919928, { rel: 0.02 });
});

Deno.test("summarise() counts the draws that have no value and leaves them out", () => {
  const s = summarise(Float64Array.of(1, NaN, 3))!;
  assert.deepEqual([s.mean, s.valid, s.count], [2, 2, 3]);
  assert.equal(summarise(Float64Array.of(NaN)), null);
  assert.equal(summarise(Float64Array.of(5))!.u, 0);
});

Deno.test("conformity() needs every requirement in the same draw and an operating point", () => {
  const met = [Uint8Array.of(1, 1, 0, 1), Uint8Array.of(1, 0, 1, 1)];
  const c = conformity(met, Uint8Array.of(1, 1, 1, 0));
  assert.equal(c.joint, 0.25);
  assert.deepEqual(c.each, [0.75, 0.75]);
  assert.equal(c.limiting, 0);
  assert.equal(conformity([], Uint8Array.of(1, 0)).joint, 0.5);
  assert.equal(conformity([Uint8Array.of(1)], Uint8Array.of(1)).limiting, null);
});

Deno.test("meets() fails a draw without a value, and includes both limits", () => {
  assert.deepEqual([...meets(Float64Array.of(NaN, 1, 2, 3), { atLeast: 1, atMost: 2 })], [0, 1, 1, 0]);
});

Deno.test("decide() accepts at the threshold and rejects below the lower one", () => {
  const t = { acceptAt: 0.9, rejectBelow: 0.1 };
  assert.deepEqual([0.9, 0.89, 0.1, 0.09].map((p) => decide(p, t)), ["accept", "hold", "hold", "reject"]);
});
