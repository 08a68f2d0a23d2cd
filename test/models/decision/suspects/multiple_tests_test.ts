import assert from "node:assert/strict";
import fc from "fast-check";
import { correctPValues } from "../../../../models/decision/suspects/multiple_tests.ts";
import { assertClose } from "../../../assert_close.ts";

Deno.test("correctPValues() reproduces the worked case and never blames less than Bonferroni", () => {
  // By hand: 4·0.005, 3·0.01, then 2·0.03 and the last not below it.
  const p = [0.01, 0.04, 0.03, 0.005];
  for (const [i, x] of [0.03, 0.06, 0.06, 0.02].entries()) {
    assertClose(correctPValues(p, "holm")[i]!, x, { rel: 1e-12 });
  }
  for (const [i, x] of [0.04, 0.16, 0.12, 0.02].entries()) {
    assertClose(correctPValues(p, "bonferroni")[i]!, x, { rel: 1e-12 });
  }
  assert.deepEqual(correctPValues([], "holm"), []);
  assert.throws(() => correctPValues([NaN], "holm"), RangeError);
  fc.assert(fc.property(fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 20 }), (ps) => {
    const [holm, bonferroni] = [correctPValues(ps, "holm"), correctPValues(ps, "bonferroni")];
    for (const [i, x] of ps.entries()) assert.ok(x <= holm[i]! && holm[i]! <= bonferroni[i]!);
  }));
});
