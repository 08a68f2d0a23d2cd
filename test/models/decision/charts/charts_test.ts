import assert from "node:assert/strict";
import fc from "fast-check";
import { defectChart, shareChart } from "../../../../models/decision/charts/counts.ts";
import { ewmaChart } from "../../../../models/decision/charts/ewma.ts";
import { groupCharts } from "../../../../models/decision/charts/group_means.ts";
import { individualsCharts } from "../../../../models/decision/charts/individuals.ts";
import type { ControlChart } from "../../../../models/decision/charts/control_chart.ts";
import { randomFrom } from "../../../../shared/random.ts";
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

Deno.test("groupCharts() reproduce the piston-ring example", async () => {
  // D. C. Montgomery, Introduction to Statistical Quality Control: 25 groups carry the limits, of 15 more the groups 37, 38, 39 are out.
  const { data, results, subgroup_size } = (await stats()).xbar_r_s_piston_rings;
  const groups: number[][] = [];
  for (let i = 0; i < data.length; i += subgroup_size) groups.push(data.slice(i, i + subgroup_size));
  const ranges = groupCharts(groups, "range", { baseline: 25, rules: ["beyond_3s"] });
  assertClose(ranges.centre, results.grand_mean, { abs: 1e-9 });
  assertClose(ranges.spreads.points[0]!.centre, results.R_bar, { abs: 1e-10 });
  // The reference divides by d2 rounded to seven digits.
  assertClose(ranges.sigma, results.sigma_R_exact_d2, { abs: 5e-10 });
  assertClose(ranges.means.points[0]!.lower, results.xbar_limits[0], { abs: 1e-7 });
  assertClose(ranges.means.points[0]!.upper, results.xbar_limits[1], { abs: 1e-7 });
  assertClose(ranges.spreads.points[0]!.upper, results.R_UCL, { abs: 1e-6 });
  assert.deepEqual(out(ranges.means), results.phase2_out_1based);
  assert.deepEqual(out(ranges.spreads), []);
  const deviations = groupCharts(groups, "deviation", { baseline: 25, rules: ["beyond_3s"] });
  assertClose(deviations.spreads.points[0]!.centre, results.S_bar, { abs: 1e-10 });
  assertClose(deviations.sigma, results.sigma_S, { abs: 1e-10 });
  assertClose(deviations.spreads.points[0]!.upper, results.S_UCL, { abs: 1e-8 });
  assert.deepEqual(out(deviations.means), results.phase2_out_1based);
});

Deno.test("groupCharts() find sigma without bias from groups of any size", () => {
  const random = randomFrom("groups");
  for (const measure of ["range", "deviation"] as const) {
    let sum = 0;
    for (let k = 0; k < 400; k++) {
      const sizes = [2, 9, 3, 1, 5, 4];
      sum += groupCharts(
        sizes.map((n) => Array.from({ length: n }, () => 7 + 2 * random.normal())),
        measure,
      ).sigma;
    }
    // The standard error of the mean over 400 is 0.8 %.
    assertClose(sum / 400, 2, { rel: 0.03 }, measure);
  }
});

Deno.test("groupCharts() leave out missing values and refuse what has no spread", () => {
  const { means, spreads, sigma } = groupCharts([[1, 3, NaN], [], [2], [0, 2]], "range");
  assert.deepEqual(means.points.map((p) => p.value), [2, NaN, 2, 1]);
  assert.deepEqual(spreads.points.map((p) => p.value), [2, NaN, NaN, 2]);
  assertClose(sigma, Math.sqrt(Math.PI), { rel: 1e-12 });
  assertClose(means.points[2]!.upper, 8 / 5 + 3 * sigma, { rel: 1e-12 });
  assertClose(means.points[0]!.upper, 8 / 5 + 3 * sigma / Math.sqrt(2), { rel: 1e-12 });
  assert.throws(() => groupCharts([[1], [2]], "range"), /0 groups of 2 or more/);
  assert.throws(() => groupCharts([], "deviation"), RangeError);
  const flat = groupCharts([[1, 1], [2, 2]], "deviation").means;
  assert.deepEqual([flat.signals.length, flat.remarks[0]?.includes("no point can be judged")], [0, true]);
});

Deno.test("ewmaChart() reproduces the example of the handbook", async () => {
  // NIST/SEMATECH e-Handbook, 6.3.2.4: last 51.99, limits 52.5884 and 47.4115 (47.4116 by the same formula), no signal.
  const e = (await stats()).ewma;
  const chart = ewmaChart(e.x, { target: e.target, sigma: e.sigma, weight: e.lam });
  for (const [i, p] of chart.points.entries()) assertClose(p.value, e.ewma[i], { abs: 6e-7 });
  // The handbook draws the limits of a long past; after twenty points the difference is 0.7⁴⁰ of their half-width.
  assertClose(chart.points[19]!.upper, e.limits[0], { abs: 2e-6 });
  assertClose(chart.points[19]!.lower, e.limits[1], { abs: 2e-6 });
  assertClose(chart.points[0]!.upper, 50 + 3 * 0.3 * e.sigma, { rel: 1e-12 });
  assert.deepEqual(chart.signals, []);
  assert.throws(() => ewmaChart([1], { target: 0, sigma: 1, weight: 0 }), RangeError);
  assert.deepEqual(ewmaChart([5, NaN, 5], { target: 0, sigma: 1, weight: 1 }).signals.map((s) => s.at), [
    0,
    2,
  ]);
});

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
