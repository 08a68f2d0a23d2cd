import assert from "node:assert/strict";
import { type Capability, capability, capabilityOf } from "../../../../models/decision/charts/capability.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const stats = async () => JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));

Deno.test("capabilityOf() reproduces the piston-ring example with its intervals", async () => {
  // D. C. Montgomery, Introduction to Statistical Quality Control, limits 73.95 and 74.05; n = 125, sigma from the ranges.
  const { capability: expected, results } = (await stats()).xbar_r_s_piston_rings;
  const found = capabilityOf(
    { n: 125, mean: results.grand_mean, s: results.sigma_R_exact_d2 },
    { lower: expected.LSL, upper: expected.USL, target: expected.T },
  ) as Capability;
  for (const [name, value] of [["cp", expected.Cp], ["cpk", expected.Cpk], ["cpm", expected.Cpm]]) {
    assertClose(found[name as "cp" | "cpk" | "cpm"]!.value, value, { abs: 1e-6 }, name);
  }
  assertClose(found.cpl!, expected.Cpl, { abs: 1e-6 });
  assertClose(found.cpu!, expected.Cpu, { abs: 1e-6 });
  assertClose(found.cp!.lo, expected.Cp_ci95[0], { abs: 1e-6 });
  assertClose(found.cp!.hi, expected.Cp_ci95[1], { abs: 1e-6 });
  assertClose(found.cpk.lo, expected.Cpk_ci95[0], { abs: 1e-6 });
  assertClose(found.cpk.hi, expected.Cpk_ci95[1], { abs: 1e-6 });
  // Printed for the same data, from memory: one-sided lower bound of cpu 1.483; cpm 1.480 to 1.902, a little wide because the
  // degrees of freedom there are n(1 + ξ²)/(1 + 2ξ²). Matching mean and variance of Σ(x − target)² squares the numerator.
  assertClose(found.cpkAtLeast, 1.483, { abs: 5e-4 });
  assertClose(found.cpm!.lo, 1.480, { abs: 2e-3 });
  assertClose(found.cpm!.hi, 1.902, { abs: 2e-3 });
});

Deno.test("capabilityOf() reproduces the example of the handbook", async () => {
  // NIST/SEMATECH e-Handbook, 6.1.6.
  const e = (await stats()).capability_example;
  const found = capabilityOf({ n: 50, mean: e.mean, s: e.s }, {
    lower: e.LSL,
    upper: e.USL,
    target: 14,
  }) as Capability;
  assertClose(found.cp!.value, e.Cp, { rel: 1e-14 });
  assertClose(found.cpk.value, e.Cpk, { abs: 1e-8 });
  assertClose(found.cpl!, e.Cpl, { abs: 1e-8 });
  assertClose(found.cpm!.value, e.Cpm_T14, { abs: 1e-8 });
  assertClose(found.outside, e.fraction_outside_normal, { abs: 1e-7 });
});

Deno.test("capability() intervals cover what they promise, from the least number of values on", () => {
  const random = randomFrom("capability");
  for (const [n, mean, target] of [[10, 0.5, 0], [10, 0, 0], [40, 1, 0], [40, 0, 2], [12, 4.5, 0]] as const) {
    const draws = 2000;
    let [cp, cpk, bound, cpm] = [0, 0, 0, 0];
    const trueCpk = (4 - Math.abs(mean)) / 3;
    const trueCpm = 8 / (6 * Math.hypot(1, mean - target));
    for (let k = 0; k < draws; k++) {
      const x = Array.from({ length: n }, () => mean + random.normal());
      const c = capability(x, { lower: -4, upper: 4, target }) as Capability;
      if (c.cp!.lo <= 4 / 3 && 4 / 3 <= c.cp!.hi) cp++;
      if (c.cpk.lo <= trueCpk && trueCpk <= c.cpk.hi) cpk++;
      if (c.cpkAtLeast <= trueCpk) bound++;
      if (c.cpm!.lo <= trueCpm && trueCpm <= c.cpm!.hi) cpm++;
    }
    // Standard error 0.5 %. Cp is exact; Bissell and Boyles are approximations, and with the mean in the middle the smaller of
    // two sides is low more often than high.
    const what = `${n} values about ${mean}`;
    assertClose(cp / draws, 0.95, { abs: 0.02 }, `cp, ${what}`);
    assertClose(cpk / draws, 0.95, { abs: 0.035 }, `cpk, ${what}`);
    assert.ok(bound / draws > 0.92, `bound of cpk held in ${bound} of ${draws}, ${what}`);
    assertClose(cpm / draws, 0.95, { abs: 0.035 }, `cpm, ${what}`);
  }
});

Deno.test("capability() with one limit has no cp, and does not change with the unit", () => {
  const x = [3, 4, 5, 3, 4, 5, 6, 2, 4, 4.5, NaN];
  const one = capability(x, { upper: 9 }) as Capability;
  assert.deepEqual([one.n, one.cp, one.cpl, one.cpm, one.cpk.value], [10, null, null, null, one.cpu]);
  const mirrored = capability(x.map((v) => -1e6 * v), { lower: -9e6 }) as Capability;
  assertClose(mirrored.cpk.value, one.cpk.value, { rel: 1e-12 });
  assertClose(mirrored.cpk.lo, one.cpk.lo, { rel: 1e-12 });
  const off = capability(x, { lower: 4.2, upper: 9 }) as Capability;
  assert.ok(off.cpk.value < 0 && off.cpk.lo < off.cpk.value && off.cpk.value < off.cpk.hi);
});

Deno.test("capability() refuses too few values, equal values and wrong limits", () => {
  assert.deepEqual(capability([1, 2, 3], { lower: 0 }), {
    refused: "capability needs at least 10 values, found 3",
  });
  assert.match((capability([], { lower: 0 }) as { refused: string }).refused, /found 0/);
  assert.match((capability(Array(12).fill(0.1), { lower: 0 }) as { refused: string }).refused, /differ/);
  const x = Array.from({ length: 12 }, (_, i) => i);
  for (const wrong of [{}, { lower: 2, upper: 1 }, { lower: NaN }, { target: 1 }]) {
    assert.throws(() => capability(x, wrong), RangeError);
  }
  assert.throws(() => capability(x, { lower: 0 }, 1), /confidence of 1/);
});
