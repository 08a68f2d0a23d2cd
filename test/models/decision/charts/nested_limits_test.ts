import { equal, ok } from "node:assert/strict";
import { nestedLimits } from "../../../../models/decision/charts/mod.ts";
import { tTwoSided } from "../../../../models/decision/tails.ts";
import { type Random, randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

function batch(random: Random, groups: number, lot: number, wafer: number) {
  const effect = lot * random.normal();
  return Array.from({ length: groups }, () => ({ mean: 5 + effect + wafer * random.normal(), values: 8 }));
}

Deno.test("nestedLimits() are those of the one-way layout: batch means and what groups of a batch add", () => {
  const g = (mean: number) => ({ mean, values: 3 });
  const found = nestedLimits([[g(1), g(3)], [g(4), g(6)], [g(7), g(11)]])!;
  equal(found.centre, 16 / 3);
  // Batch means 2, 5, 9: variance 37/3; within 2 + 2 + 8 over 3 degrees of freedom.
  assertClose(found.sd ** 2, 37 / 3 + 0.5 * 4, { rel: 1e-12 });
  assertClose(found.uCentre ** 2, 37 / 9, { rel: 1e-12 });
  assertClose(found.degreesOfFreedom, (37 / 3 + 2) ** 2 / ((37 / 3) ** 2 / 2 + 4 / 3), { rel: 1e-12 });
  assertClose(found.betweenGroups!, 2, { rel: 1e-12 });
  equal(nestedLimits([[g(1)], [g(2)]]), null);
  equal(nestedLimits([[g(1)], [g(1)], [g(1)]]), null);
  equal(nestedLimits([[g(1)], [g(2)], [g(4)], []])!.betweenGroups, null);
});

Deno.test("a wafer of a good lot is called as often as promised, whichever level varies and however few the lots", () => {
  const random = randomFrom("nested");
  for (
    const [lots, wafers, lot, wafer] of [[8, 2, 1, 0.5], [8, 3, 0.2, 1], [20, 2, 1, 1], [8, 1, 1, 0]] as const
  ) {
    const trials = 6000;
    let called = 0;
    for (let k = 0; k < trials; k++) {
      const { centre, sd, uCentre, degreesOfFreedom } = nestedLimits(
        Array.from({ length: lots }, () => batch(random, wafers, lot, wafer)),
      )!;
      const [own] = batch(random, 1, lot, wafer);
      if (tTwoSided((own!.mean - centre) / Math.hypot(sd, uCentre), degreesOfFreedom) < 0.05) called++;
    }
    // Standard error 0.28 %. Satterthwaite is an approximation, and never a generous one here.
    ok(called / trials > 0.035 && called / trials < 0.06, `${lots} lots of ${wafers}: ${called / trials}`);
  }
});
