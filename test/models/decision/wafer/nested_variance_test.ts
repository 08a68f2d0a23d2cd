import assert from "node:assert/strict";
import fc from "fast-check";
import {
  betweenShareInterval,
  type NestedValue,
  type NestedVariance,
  nestedVariance,
} from "../../../../models/decision/wafer/nested_variance.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const stats = async () => JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));
const oneWay = (groups: readonly (readonly number[])[]): NestedValue[] =>
  groups.flatMap((g, i) => g.map((value) => ({ value, groups: [`${i}`] })));

Deno.test("nestedVariance() reproduces the oxide thickness of lots, wafers and sites", async () => {
  // J. C. Pinheiro, D. M. Bates, Mixed-Effects Models in S and S-PLUS (2000): standard deviations 11.398, 5.9888, 3.5453.
  const e = (await stats()).nested_oxide;
  const values = e.thickness.map((value: number, i: number) => ({
    value,
    groups: [`${Math.floor(i / 9)}`, `${Math.floor(i / 3) % 3}`],
  }));
  const found = nestedVariance(values, ["lot", "wafer", "site"]) as NestedVariance;
  assert.deepEqual(found.levels.map((l) => [l.names, l.groups]), [[["lot"], 8], [["wafer"], 24], [
    ["site"],
    72,
  ]]);
  for (const [l, level] of found.levels.entries()) {
    assert.equal(level.df, e.df[l]);
    assertClose(level.sumOfSquares, e.SS[l], { abs: 1e-7 });
    assertClose(level.variance, e.variance[l], { abs: 1e-7 });
    assertClose(100 * level.share, e.percent[l], { abs: 1e-6 });
    if (l < 2) assertClose(level.test!.f, e.F[l], { abs: 1e-7 });
  }
  assert.deepEqual(found.levels[0]!.test!.df2, 16);
  assertClose(found.mean, e.grand, { abs: 1e-8 });
  assertClose(found.standardError, e.se_grand, { abs: 1e-7 });
});

Deno.test("nestedVariance() reproduces the dyestuff batches with the interval of their share", async () => {
  // O. L. Davies, Statistical Methods in Research and Production; G. E. P. Box, G. C. Tiao (1973). REML 1764.05.
  const e = (await stats()).one_way_random.dyestuff;
  const found = nestedVariance(oneWay(e.groups), ["batch", "yield"]) as NestedVariance;
  const [batch, rest] = found.levels;
  assertClose(batch!.variance, e.var_between_REML, { rel: 1e-12 });
  assertClose(rest!.variance, e.MSW, { rel: 1e-12 });
  assertClose(batch!.test!.f, e.F, { abs: 1e-8 });
  assertClose(batch!.test!.p, e.p, { abs: 1e-8 });
  assertClose(batch!.share, e.ICC, { abs: 1e-8 });
  assertClose(found.standardError, e.se_grand, { abs: 1e-8 });
  const { lo, hi } = betweenShareInterval(batch!.test!, 5);
  assertClose(lo, e.ICC_ci95[0], { abs: 1e-8 });
  assertClose(hi, e.ICC_ci95[1], { abs: 1e-8 });
});

Deno.test("nestedVariance() keeps its digits where values share seven of theirs", async () => {
  // NIST StRD, AtmWtAg (average difficulty): certified between 3.63834187500000e-09, within 1.04951729166667e-08, F 15.9467335677930.
  const e = (await stats()).one_way_random.atmwtag;
  const [instrument, rest] =
    (nestedVariance(oneWay(e.groups), ["instrument", "run"]) as NestedVariance).levels;
  assertClose(instrument!.sumOfSquares, e.SSB, { rel: 1e-7 });
  assertClose(rest!.sumOfSquares, e.SSW, { rel: 1e-7 });
  assertClose(instrument!.test!.f, e.F, { rel: 1e-7 });
});

Deno.test("nestedVariance() is unbiased for groups of any size, and its tests hold their level", () => {
  const random = randomFrom("unbalanced");
  const sizes = [[5, 1, 2], [3], [2, 2], [8, 1], [1, 4, 3], [6, 6], [2, 1, 1, 1]];
  const runs = 1500;
  const sum = [0, 0, 0];
  let [alarms, untested] = [0, 0];
  const draw = (sdWafer: number, sdDie: number) =>
    nestedVariance(
      sizes.flatMap((dies, w) => {
        const wafer = sdWafer * random.normal();
        return dies.flatMap((n, d) => {
          const die = sdDie * random.normal();
          return Array.from(
            { length: n },
            () => ({ value: 50 + wafer + die + random.normal(), groups: [`${w}`, `${d}`] }),
          );
        });
      }),
      ["wafer", "die", "guide"],
    ) as NestedVariance;
  for (let k = 0; k < runs; k++) {
    draw(2, 1.5).levels.forEach((l, i) => sum[i]! += l.estimate / runs);
    const { test } = draw(0, 1.5).levels[0]!;
    if (test === null) untested++;
    else if (test.p < 0.05) alarms++;
  }
  // Standard errors 0.08, 0.04 and 0.01.
  assertClose(sum[0]!, 4, { abs: 0.35 });
  assertClose(sum[1]!, 2.25, { abs: 0.15 });
  assertClose(sum[2]!, 1, { abs: 0.04 });
  assertClose(alarms / (runs - untested), 0.05, { abs: 0.025 });
  assert.ok(untested < 0.02 * runs, `${untested} of ${runs} could not be tested`);
});

Deno.test("nestedVariance() splits the sum of squares without rest, and follows a change of unit", () => {
  const value = fc.record({
    value: fc.integer({ min: -50, max: 50 }),
    groups: fc.tuple(fc.constantFrom("a", "b", "c"), fc.constantFrom("1", "2", "3")),
  });
  fc.assert(
    fc.property(
      fc.array(value, { minLength: 2, maxLength: 30 }),
      fc.constantFrom(1e-9, 1e9),
      (values, scale) => {
        const found = nestedVariance(values, ["wafer", "die", "guide"]) as NestedVariance;
        const centre = values.reduce((s, v) => s + v.value, 0) / values.length;
        const all = values.reduce((s, v) => s + (v.value - centre) ** 2, 0);
        assertClose(found.levels.reduce((s, l) => s + l.sumOfSquares, 0), all, { rel: 1e-9, abs: 1e-9 });
        assert.equal(found.levels.reduce((s, l) => s + l.df, 0), values.length - 1);
        if (found.total > 0) assertClose(found.levels.reduce((s, l) => s + l.share, 0), 1, { rel: 1e-12 });
        assert.deepEqual([...found.unseen, ...found.levels.flatMap((l) => l.names)], [
          "wafer",
          "die",
          "guide",
        ]);
        const scaled = nestedVariance(values.map((v) => ({ ...v, value: v.value * scale })), [
          "wafer",
          "die",
          "guide",
        ]);
        for (const [i, l] of (scaled as NestedVariance).levels.entries()) {
          assertClose(l.estimate, found.levels[i]!.estimate * scale ** 2, {
            rel: 1e-7,
            abs: 1e-9 * scale ** 2,
          });
        }
      },
    ),
  );
});

Deno.test("nestedVariance() joins levels that can't be told apart, and names those that can't be seen", () => {
  const values = [1, 2, 4, 8].map((value, i) => ({ value, groups: ["L1", `W${i % 2}`, `D${i}`] }));
  const found = nestedVariance(values, ["lot", "wafer", "die", "guide"]) as NestedVariance;
  assert.deepEqual(found.unseen, ["lot"]);
  assert.deepEqual(found.levels.map((l) => l.names), [["wafer"], ["die", "guide"]]);
});

Deno.test("nestedVariance() takes the known variance of readings off the innermost level", () => {
  const values = oneWay([[1, 3], [11, 13]]);
  const found = nestedVariance(values, ["die", "guide"], 0.5) as NestedVariance;
  // Mean squares 100 and 2: between (100 − 2)/2 = 49, guide 2 − 0.5.
  assert.deepEqual(found.levels.map((l) => l.variance), [49, 1.5]);
  assertClose(found.reading!.share, 0.5 / 51, { rel: 1e-12 });
  const drowned = nestedVariance(values, ["die", "guide"], 3) as NestedVariance;
  assert.deepEqual([drowned.levels[1]!.estimate, drowned.levels[1]!.variance], [-1, 0]);
});

Deno.test("nestedVariance() of equal values is zero, of too few refused", () => {
  const equal = nestedVariance(oneWay([[0.1, 0.1], [0.1, 0.1]]), ["die", "guide"]) as NestedVariance;
  assert.deepEqual([equal.total, equal.levels[0]!.test, equal.levels[0]!.share], [0, null, NaN]);
  assert.deepEqual(nestedVariance(oneWay([[1], [NaN]]), ["die", "guide"]), {
    refused: "variance needs at least 2 values, found 1",
  });
  const alike = nestedVariance(oneWay([[1, 9], [9, 1]]), ["die", "guide"]) as NestedVariance;
  assert.ok(alike.levels[0]!.estimate < 0 && alike.levels[0]!.variance === 0);
  assert.throws(
    () => nestedVariance([{ value: 1, groups: [] }], ["die", "guide"]),
    /need a finite value and 1 groups/,
  );
  assert.throws(() => nestedVariance(oneWay([[1, 2]]), ["die", "guide"], -1), RangeError);
});
