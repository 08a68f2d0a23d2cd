import assert from "node:assert/strict";
import { falseAlarmShare } from "../../../../models/decision/charts/false_alarms.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

Deno.test("falseAlarmShare() with known limits is what single points and runs give by arithmetic", async () => {
  const known =
    JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json")).single_rule_false_alarm;
  const share = (points: number, rule: "beyond_3s" | "9_same_side" | "15_within_1s") =>
    falseAlarmShare(points, "known", 20000, randomFrom(rule), [rule]);
  // Standard errors 0.0016, 0.0004, 0.0004.
  assertClose(share(20, "beyond_3s"), 1 - (1 - known.beyond_3s) ** 20, { abs: 0.006 });
  assertClose(share(9, "9_same_side"), known["9_same_side_given_9"], { abs: 0.0016 });
  assertClose(share(15, "15_within_1s"), known["15_within_1s_given_15"], { abs: 0.0016 });
});

Deno.test("falseAlarmShare() with limits from the points themselves is small for few points", () => {
  // No outside value: a point pulls the mean and the moving ranges with it, so that few points can hardly leave their own limits.
  const few = falseAlarmShare(5, "estimated", 2000, randomFrom("few"));
  const many = falseAlarmShare(25, "estimated", 2000, randomFrom("many"));
  const known = falseAlarmShare(25, "known", 2000, randomFrom("known"));
  assert.ok(few < 0.02, `${few}`);
  assert.ok(many > 0.12 && many < known, `${many}, with known limits ${known}`);
  // An average of 91.75 points to the first of the four rules' alarms: near 1 − exp(−25/91.75) = 0.24, a little less for the start.
  assertClose(known, 0.23, { abs: 0.04 });
  assert.throws(() => falseAlarmShare(1, "known", 10, randomFrom(1)), RangeError);
});
