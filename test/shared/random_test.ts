import assert from "node:assert/strict";
import { randomFrom, seedOf } from "../../shared/random.ts";
import { mean, standardDeviation } from "../../shared/statistics.ts";
import { assertClose } from "../assert_close.ts";

const first = (count: number, seed: (k: number) => number | string, skip = 0) =>
  Float64Array.from({ length: count }, (_, k) => {
    const random = randomFrom(seed(k));
    for (let n = 0; n < skip; n++) random.uniform();
    return random.uniform();
  });

Deno.test("randomFrom() repeats itself for a seed and differs between seeds", () => {
  const take = (seed: number | string) => {
    const r = randomFrom(seed);
    return [r.uniform(), r.normal(), r.below(1000), r.normal()];
  };
  assert.deepEqual(take("K07-1/05/g12"), take("K07-1/05/g12"));
  assert.notDeepEqual(take("K07-1/05/g12"), take("K07-1/05/g13"));
  assert.notDeepEqual(take(1), take(2));
});

for (
  const [what, seed] of [["neighbouring numbers", (k: number) => k], [
    "neighbouring texts",
    (k: number) => `g${k}`,
  ]] as const
) {
  for (const skip of [0, 1, 2]) {
    Deno.test(`randomFrom() of ${what} has a uniform number ${skip}`, () => {
      // Moments of the uniform distribution within 5 standard errors: 1/2, and 1/√12 with kurtosis 9/5.
      const n = 20_000;
      const x = first(n, seed, skip);
      assertClose(mean(x), 0.5, { abs: 5 / Math.sqrt(12 * n) });
      assertClose(standardDeviation(x), 1 / Math.sqrt(12), {
        abs: 5 * Math.sqrt(0.8 / 4 / n) / Math.sqrt(12),
      });
      const lag = mean(x.slice(1).map((v, k) => (v - 0.5) * (x[k]! - 0.5))) * 12;
      assertClose(lag, 0, { abs: 5 / Math.sqrt(n) }, "correlation of neighbours");
    });
  }
}

Deno.test("normal() has the moments and tails of a normal", () => {
  const random = randomFrom("moments");
  const n = 200_000;
  const x = Float64Array.from({ length: n }, () => random.normal());
  assertClose(mean(x), 0, { abs: 5 / Math.sqrt(n) });
  assertClose(standardDeviation(x), 1, { abs: 5 / Math.sqrt(2 * n) });
  const beyond = x.filter((v) => Math.abs(v) > 1.959963985).length / n;
  assertClose(beyond, 0.05, { abs: 5 * Math.sqrt(0.05 * 0.95 / n) });
});

Deno.test("below() gives every integer its share and refuses no range", () => {
  const random = randomFrom(7);
  const counts = new Array(6).fill(0);
  const n = 60_000;
  for (let k = 0; k < n; k++) counts[random.below(6)]++;
  for (const c of counts) assertClose(c / n, 1 / 6, { abs: 5 * Math.sqrt(5 / 36 / n) });
  assert.throws(() => random.below(0), RangeError);
});

Deno.test("seedOf() tells near texts apart", () => {
  const seeds = new Set(Array.from({ length: 10_000 }, (_, k) => seedOf(`K07-1/05/g${k}`)));
  assert.equal(seeds.size, 10_000);
});
