import assert from "node:assert/strict";
import type { ControlChart } from "../../../../models/decision/charts/control_chart.ts";
import { groupCharts } from "../../../../models/decision/charts/group_means.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const stats = async () => JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));
const out = (chart: ControlChart) => chart.signals.filter((s) => s.rule === "beyond_3s").map((s) => s.at + 1);

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
