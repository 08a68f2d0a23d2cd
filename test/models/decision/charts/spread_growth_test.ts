import { equal, ok } from "node:assert/strict";
import { compareSpread, spreadOfGroups } from "../../../../models/decision/charts/mod.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const sample = (variance: number, degreesOfFreedom: number, readingVariance = 0) => ({
  variance,
  degreesOfFreedom,
  readingVariance,
});

Deno.test("compareSpread() reproduces the handbook's comparison of two batches of ceramics", () => {
  // NIST/SEMATECH e-Handbook, 1.3.5.9 (JAHANMI2.DAT): s 65.54909 and 61.85425 of 240 each; F = 1.123037, cdf 0.814808.
  const found = compareSpread(sample(65.54909 ** 2, 239), sample(61.85425 ** 2, 239))!;
  assertClose(found.ratio, 1.123037, { abs: 5e-7 });
  assertClose(1 - found.p, 0.814808, { abs: 5e-7 });
});

Deno.test("spreadOfGroups() pools about the groups' own means", () => {
  const pooled = spreadOfGroups([
    { values: [1, 3], readingVariance: 0.1 },
    { values: [10, 14, 12], readingVariance: 0.2 },
    { values: [7], readingVariance: 0.6 },
    { values: [], readingVariance: 9 },
  ]);
  equal(pooled.degreesOfFreedom, 3);
  assertClose(pooled.variance, (2 + 8) / 3, { rel: 1e-14 });
  assertClose(pooled.readingVariance, (0.2 + 0.6 + 0.6) / 6, { rel: 1e-14 });
  ok(Number.isNaN(spreadOfGroups([{ values: [7], readingVariance: 0 }]).variance));
});

Deno.test("compareSpread() allows for readings worse than the reference's, and asks no more of better ones", () => {
  const before = sample(4, 50, 1);
  assertClose(compareSpread(sample(9, 10, 6), before)!.ratio, 1, { rel: 1e-14 });
  assertClose(compareSpread(sample(8, 10, 0), before)!.ratio, 2, { rel: 1e-14 });
  equal(compareSpread(sample(8, 1), before), null);
  equal(compareSpread(sample(8, 10), sample(4, 3)), null);
  equal(compareSpread(sample(8, 10), sample(0, 30)), null);
});

Deno.test("compareSpread() calls as often as it promises, also when the readings are worse than before", () => {
  const random = randomFrom("spread");
  const draw = (n: number, sd: number) => Array.from({ length: n }, () => sd * random.normal());
  for (const own of [0.5, 2]) {
    let called = 0;
    const trials = 4000;
    for (let k = 0; k < trials; k++) {
      const groups = (count: number, n: number, reading: number) =>
        spreadOfGroups(
          Array.from({ length: count }, () => ({
            values: draw(n, Math.hypot(1, reading)),
            readingVariance: reading ** 2,
          })),
        );
      if (compareSpread(groups(1, 8, own), groups(10, 8, 0.5))!.p < 0.05) called++;
    }
    // Standard error 0.35 %.
    assertClose(called / trials, 0.05, { abs: 0.012 }, `readings of ${own}`);
  }
});
