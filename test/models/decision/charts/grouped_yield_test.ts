import assert from "node:assert/strict";
import { groupedYield } from "../../../../models/decision/charts/grouped_yield.ts";
import { exactInterval } from "../../../../models/decision/yields.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

Deno.test("groupedYield() covers the yield where dies share the fate of their wafer, and counting does not", () => {
  const random = randomFrom("wafers");
  const draws = 1500;
  let [grouped, counted] = [0, 0];
  for (let k = 0; k < draws; k++) {
    const groups = Array.from({ length: 12 }, () => {
      // Wafer yields uniform over 0.5…0.9: 0.7 in the mean.
      const p = 0.5 + 0.4 * random.uniform();
      const of = 30 + random.below(20);
      let good = 0;
      for (let i = 0; i < of; i++) if (random.uniform() < p) good++;
      return { good, of };
    });
    const y = groupedYield(groups);
    if (y.low <= 0.7 && 0.7 <= y.high) grouped++;
    const plain = exactInterval(y.good, y.of);
    if (plain.low <= 0.7 && 0.7 <= plain.high) counted++;
  }
  assert.ok(grouped / draws > 0.94, `covers ${grouped / draws}`);
  assert.ok(counted / draws < 0.8, `counting covers ${counted / draws}`);
});

Deno.test("groupedYield() of equal groups is as good as counting, of unanimous groups counts the groups", () => {
  const even = groupedYield(Array(40).fill({ good: 7, of: 10 }));
  assert.equal(even.designEffect, 1);
  // Only the Student factor of 40 groups is paid for.
  assertClose(even.effectiveUnits, 400 * (1.9659 / 2.0227) ** 2, { rel: 1e-4 });
  const perfect = groupedYield([{ good: 10, of: 10 }, { good: 30, of: 30 }, { good: 0, of: 0 }]);
  assert.deepEqual([perfect.groups, perfect.effectiveUnits, perfect.high], [2, 2, 1]);
  assertClose(perfect.low, exactInterval(2, 2).low, { rel: 1e-14 });
  const lost = groupedYield([{ good: 0, of: 10 }, { good: 0, of: 30 }]);
  assertClose(lost.high, exactInterval(0, 2).high, { rel: 1e-14 });
  // Wafers all good or all bad: each is one unit.
  const whole = groupedYield(Array.from({ length: 20 }, (_, i) => ({ good: i % 2 ? 25 : 0, of: 25 })));
  assertClose(whole.effectiveUnits, 19 * (1.9647 / 2.0930) ** 2, { rel: 1e-3 });
  // Of two wafers, one good and one lost: nothing is known, and no limit of 1e-100 says otherwise.
  const torn = groupedYield([{ good: 10, of: 10 }, { good: 0, of: 10 }]);
  assert.deepEqual([torn.low, torn.high], [0, 1]);
  assert.throws(() => groupedYield([{ good: 1, of: 2 }]), /1 groups: need at least 2/);
});

Deno.test("groupedYield() of groups of one unit is wider than counting by no more than the Student factor allows", () => {
  // A single unit per group: the design effect is n/(n − 1), the Student factors are equal.
  const singles = groupedYield(Array.from({ length: 50 }, (_, i) => ({ good: i < 45 ? 1 : 0, of: 1 })));
  assertClose(singles.effectiveUnits, 49, { rel: 1e-12 });
  // Clopper–Pearson of 45 of 50 is 0.7819 to 0.9667.
  assertClose(singles.low, 0.7818646, { abs: 0.003 });
  assertClose(singles.high, 0.9667249, { abs: 0.002 });
  assert.throws(() => groupedYield([{ good: 3, of: 2 }, { good: 1, of: 2 }]), /yield of 3 in 2/);
  assert.throws(() => groupedYield([{ good: 0.5, of: 2 }, { good: 1, of: 2 }]), RangeError);
});
