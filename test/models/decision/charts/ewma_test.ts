import assert from "node:assert/strict";
import { ewmaChart } from "../../../../models/decision/charts/ewma.ts";
import { assertClose } from "../../../assert_close.ts";

const stats = async () => JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));

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
