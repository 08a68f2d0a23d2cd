import assert from "node:assert/strict";
import type { ControlChart } from "../../../../models/decision/charts/control_chart.ts";
import { defectChart, shareChart } from "../../../../models/decision/charts/counts.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const stats = async () => JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));
const out = (chart: ControlChart) => chart.signals.filter((s) => s.rule === "beyond_3s").map((s) => s.at + 1);

Deno.test("defectChart() and shareChart() reproduce the examples of the handbook", async () => {
  const { c_chart, p_chart } = await stats();
  // NIST/SEMATECH e-Handbook, 6.3.3.1 (defects of wafers).
  const c = defectChart(c_chart.counts);
  assert.equal(c.centre, 16);
  assertClose(c.chart.points[0]!.upper, 28, { abs: 1e-12 });
  assertClose(c.chart.points[0]!.lower, 4, { abs: 1e-12 });
  assert.deepEqual(out(c.chart), c_chart.out_of_limits_1based);
  // NIST/SEMATECH e-Handbook, 6.3.3.2.
  const sizes = p_chart.counts.map(() => p_chart.n);
  const p = shareChart(p_chart.counts, sizes);
  assertClose(p.centre, p_chart.center, { abs: 1e-8 });
  assertClose(p.chart.points[0]!.upper, p_chart.UCL, { abs: 1e-8 });
  assertClose(p.chart.points[0]!.lower, p_chart.LCL, { abs: 1e-8 });
  assert.deepEqual(out(p.chart), p_chart.out_of_limits_1based);
  // Left out, the two points are missing and the limits rest on the others.
  const without = sizes.map((n: number, i: number) => i === 14 || i === 22 ? 0 : n);
  const again = shareChart(p_chart.counts.map((k: number, i: number) => without[i] === 0 ? 0 : k), without);
  assertClose(again.centre, p_chart.after_removal.center, { abs: 1e-12 });
  assertClose(again.chart.points[0]!.upper, p_chart.after_removal.UCL, { abs: 1e-7 });
  assertClose(again.chart.points[0]!.lower, p_chart.after_removal.LCL, { abs: 1e-7 });
});

Deno.test("shareChart() with measured dispersion keeps lots in that share their fate", () => {
  // Yields of lots scatter by 0.05 about 0.7; 1000 guides each would scatter by 0.014 alone.
  const random = randomFrom("lots");
  const sizes = Array(400).fill(1000);
  const counts = sizes.map((n) => Math.round(n * (0.7 + 0.05 * random.normal())));
  const plain = shareChart(counts, sizes);
  const wide = shareChart(counts, sizes, { measuredDispersion: true });
  assert.equal(plain.dispersion, 1);
  assert.ok(out(plain.chart).length > 100);
  assert.ok(out(wide.chart).length <= 5, `${out(wide.chart).length} of 400 out`);
  assertClose(wide.dispersion, 0.05 / Math.sqrt(0.21 / 1000), { rel: 0.1 });
});

Deno.test("shareChart() and defectChart() refuse impossible counts and warn of small ones", () => {
  assert.throws(() => shareChart([3], [2]), /found 3 of 2/);
  assert.throws(() => shareChart([1.5], [2]), RangeError);
  assert.throws(() => shareChart([0, 0], [0, 0]), /total size of 0/);
  assert.throws(() => defectChart([1], [0]), RangeError);
  assert.match(shareChart([1, 2], [20, 20]).chart.remarks.join(), /false alarms are more frequent/);
  const perfect = shareChart([20, 20], [20, 20]).chart;
  assert.deepEqual(perfect.signals, []);
  assert.match(perfect.remarks.join(), /no point can be judged/);
  assert.deepEqual(defectChart([4, 40], [1, 10]).chart.points.map((p) => p.value), [4, 4]);
});
