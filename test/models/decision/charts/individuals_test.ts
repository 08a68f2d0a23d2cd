import assert from "node:assert/strict";
import fc from "fast-check";
import type { ControlChart } from "../../../../models/decision/charts/control_chart.ts";
import { individualsCharts } from "../../../../models/decision/charts/individuals.ts";
import { assertClose } from "../../../assert_close.ts";

const stats = async () => JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));
const out = (chart: ControlChart) => chart.signals.filter((s) => s.rule === "beyond_3s").map((s) => s.at + 1);

Deno.test("individualsCharts() reproduces the flow-rate example", async () => {
  // NIST/SEMATECH e-Handbook, 6.3.2.2: 50.81, 55.8041 and 45.8159 with d2 rounded to 1.128; range limit 6.1347 with 3.267.
  const { x, with_d2_exact } = (await stats()).individuals_flow_rate;
  const { centre, individuals, movingRange } = individualsCharts(x);
  assertClose(centre, 50.81, { abs: 1e-12 });
  assertClose(individuals.points[0]!.upper, with_d2_exact.UCL, { abs: 1e-8 });
  assertClose(individuals.points[0]!.lower, with_d2_exact.LCL, { abs: 1e-8 });
  assertClose(individuals.points[0]!.upper, 55.8041, { rel: 4e-5 });
  assertClose(movingRange.points[1]!.centre, 1.877778, { abs: 1e-6 });
  assertClose(movingRange.points[1]!.upper, 6.1347, { rel: 2e-4 });
  assert.equal(movingRange.points[1]!.lower, 0);
  assert.deepEqual([individuals.signals, movingRange.signals], [[], []]);
  assert.match(individuals.remarks.join(), /10 points and are provisional/);
});

Deno.test("individualsCharts() judges later points by the limits of the earlier", () => {
  const x = [1, 2, 1, 2, 1, 2, 9, NaN, 1];
  const { individuals, movingRange, sigma } = individualsCharts(x, { baseline: 6 });
  assertClose(sigma, Math.sqrt(Math.PI) / 2, { rel: 1e-12 });
  assert.deepEqual([out(individuals), out(movingRange)], [[7], [7, 9]]);
  assert.ok(Number.isNaN(individuals.points[7]!.z));
});

Deno.test("individualsCharts() makes no limits of values that do not differ", () => {
  const { individuals } = individualsCharts([0.1, 0.1, 0.1, 0.3], { baseline: 3 });
  assert.deepEqual(individuals.signals, []);
  assert.match(individuals.remarks[0]!, /no point can be judged/);
  for (const few of [[], [1], [1, NaN]]) assert.throws(() => individualsCharts(few), RangeError);
  assert.throws(() => individualsCharts([1, 2, Infinity]), /found Infinity/);
  assert.throws(() => individualsCharts([1, 2, 3], { baseline: 4 }), RangeError);
});

Deno.test("individualsCharts() follow a change of unit", () => {
  const values = fc.array(fc.integer({ min: -1000, max: 1000 }), { minLength: 3, maxLength: 30 });
  fc.assert(fc.property(values, fc.constantFrom(1e-9, 1e9), (x, scale) => {
    fc.pre(new Set(x).size > 1);
    const plain = individualsCharts(x).individuals;
    const scaled = individualsCharts(x.map((v) => v * scale)).individuals;
    for (const [i, p] of plain.points.entries()) {
      assertClose(scaled.points[i]!.z, p.z, { rel: 1e-9, abs: 1e-9 });
      assertClose(scaled.points[i]!.upper, p.upper * scale, { rel: 1e-9, abs: 1e-9 * scale });
    }
  }));
});
