import assert from "node:assert/strict";
import fc from "fast-check";
import { isAnswer, wafer } from "./sites.ts";
import { type EdgeEffect, edgeEffect, waferTrend } from "../../../../models/decision/wafer/trend.ts";
import type { SiteValue } from "../../../../models/decision/wafer/site_fit.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

Deno.test("waferTrend() gives back the surface that the values were made of", () => {
  const random = randomFrom("surface");
  const sites = wafer((x, y) => 2.2 + 0.3 * x - 0.5 * y + 40 * (x * x + y * y) + 1e-3 * random.normal());
  const { surface, linear, radial, explained, used } = waferTrend(sites);
  assert.ok(surface !== null && isAnswer(linear) && isAnswer(radial));
  assert.equal(used, 56);
  assertClose(surface.constant, 2.2, { abs: 4 * surface.u.constant });
  assertClose(surface.slopeX, 0.3, { abs: 4 * surface.u.slopeX });
  assertClose(surface.slopeY, -0.5, { abs: 4 * surface.u.slopeY });
  assertClose(surface.bow, 40, { abs: 4 * surface.u.bow });
  assertClose(surface.residual, 1e-3, { rel: 0.35 });
  const radius = Math.max(...sites.map((s) => Math.hypot(s.x, s.y)));
  assertClose(surface.acrossWafer, 2 * radius * Math.hypot(surface.slopeX, surface.slopeY), { rel: 1e-12 });
  assertClose(surface.centreToEdge, surface.bow * radius ** 2, { rel: 1e-12 });
  assert.ok(linear.p < 1e-6 && radial.p < 1e-6 && explained > 0.9);
});

Deno.test("waferTrend() of one variable is the textbook regression", async () => {
  const stats =
    JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json")).linear_calibration.iso28037[0];
  // ISO/TS 28037:2010, 6.3: y on x = 1…6, slope 1.757, intercept 1.867 at equal weights. x as the radius squared, on directions that
  // leave no slope.
  const sites: SiteValue[] = stats.x.flatMap((x: number, i: number) =>
    [0, 1, 2, 3].map((k) => ({
      x: Math.sqrt(x) * Math.cos(k * Math.PI / 2 + i),
      y: Math.sqrt(x) * Math.sin(k * Math.PI / 2 + i),
      value: stats.y[i],
    }))
  );
  const { surface, linear } = waferTrend(sites);
  assertClose(surface!.bow, stats.b, { abs: 1e-8 });
  assertClose(surface!.constant, stats.a, { abs: 1e-8 });
  // Each point stands four times: chi-squared 1.6648·0.25 in squares of y, times 4, on 24 − 4.
  assertClose(surface!.residual, Math.sqrt(4 * stats.chi2 * 0.25 / 20), { rel: 1e-7 });
  // u(b)² = 0.25/Σ(x − x̄)² there; here 4 times as many points and the scatter found.
  assertClose(surface!.u.bow, stats.ub / 0.5 / 2 * surface!.residual, { rel: 1e-6 });
  assert.ok(isAnswer(linear) && linear.p > 0.999);
});

Deno.test("waferTrend() raises false alarms as often as its level says, and not for another shape", () => {
  const random = randomFrom("flat wafers");
  const runs = 800;
  let [linear, radial, any, bowAsSlope] = [0, 0, 0, 0];
  for (let k = 0; k < runs; k++) {
    const flat = waferTrend(wafer(() => 5 + random.normal()));
    if (isAnswer(flat.linear) && flat.linear.p < 0.05) linear++;
    if (isAnswer(flat.radial) && flat.radial.p < 0.05) radial++;
    if (isAnswer(flat.any) && flat.any.p < 0.05) any++;
    const bowed = waferTrend(wafer((x, y) => 5000 * (x * x + y * y) + random.normal()));
    if (isAnswer(bowed.linear) && bowed.linear.p < 0.05) bowAsSlope++;
  }
  // Exact tests; the standard error of the rate is 0.8 %.
  for (const [what, count] of Object.entries({ linear, radial, any, bowAsSlope })) {
    assertClose(count / runs, 0.05, { abs: 0.02 }, what);
  }
});

Deno.test("waferTrend() holds its level for weights that are the inverse of the variance", () => {
  const random = randomFrom("weights");
  const runs = 600;
  let alarms = 0;
  for (let k = 0; k < runs; k++) {
    const sites = wafer(() => 0).map((s, i) => {
      const sd = i % 3 === 0 ? 5 : 1;
      return { ...s, value: sd * random.normal(), weight: 7 / (sd * sd) };
    });
    const { any } = waferTrend(sites);
    if (isAnswer(any) && any.p < 0.05) alarms++;
  }
  assertClose(alarms / runs, 0.05, { abs: 0.025 });
});

Deno.test("waferTrend() says the same in other units, turned, and about another zero", () => {
  const noise = fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: 56, maxLength: 56 });
  fc.assert(
    fc.property(
      noise,
      fc.double({ min: 0, max: 6, noNaN: true }),
      fc.constantFrom(1e-9, 1, 1e9),
      (e, turn, scale) => {
        fc.pre(Math.max(...e) - Math.min(...e) > 1e-3);
        const sites = wafer((x, y, i) => x + 300 * y * y + e[i]!);
        const other = sites.map((s) => ({
          x: s.x * Math.cos(turn) - s.y * Math.sin(turn),
          y: s.x * Math.sin(turn) + s.y * Math.cos(turn),
          value: scale * (3 - 2 * s.value),
        }));
        const [a, b] = [waferTrend(sites), waferTrend(other)];
        for (const key of ["linear", "radial", "any"] as const) {
          const [p, q] = [a[key], b[key]];
          assert.ok(isAnswer(p) && isAnswer(q));
          assertClose(q.f, p.f, { rel: 1e-6, abs: 1e-9 }, key);
        }
        assertClose(b.surface!.centreToEdge, -2 * scale * a.surface!.centreToEdge, {
          rel: 1e-6,
          abs: 1e-9 * scale,
        });
        assertClose(b.surface!.acrossWafer, 2 * scale * a.surface!.acrossWafer, {
          rel: 1e-6,
          abs: 1e-9 * scale,
        });
      },
    ),
    { numRuns: 40 },
  );
});

Deno.test("waferTrend() refuses what the places or the number of dies can't tell", () => {
  const ring = Array.from({ length: 12 }, (_, i) => ({
    x: 0.02 * Math.cos(i * Math.PI / 6),
    y: 0.02 * Math.sin(i * Math.PI / 6),
    value: i % 5,
  }));
  const onRing = waferTrend(ring);
  assert.deepEqual(onRing.radial, { refused: "the places of the dies don't determine a radial trend" });
  assert.ok(isAnswer(onRing.linear) && onRing.linear.df1 === 2 && onRing.surface === null);
  const line = waferTrend(Array.from({ length: 9 }, (_, i) => ({ x: i - 4, y: 0, value: i % 4 })));
  assert.ok(isAnswer(line.linear) && line.linear.df1 === 1 && isAnswer(line.radial));
  const few = waferTrend(ring.slice(0, 4));
  assert.match((few.any as { refused: string }).refused, /needs at least 5 dies, found 4/);
  for (
    const [sites, reason] of [
      [[], /at least 2 dies, found 0/],
      [[{ x: 1, y: 1, value: 2 }, { x: 1, y: 2, value: NaN }], /found 1/],
      [wafer(() => 0.1), /do not differ/],
      [[{ x: 0, y: 0, value: 2 }, { x: 0, y: 0, value: 3 }], /at the centre/],
    ] as const
  ) {
    assert.match((waferTrend(sites).any as { refused: string }).refused, reason);
  }
  assert.throws(() => waferTrend([{ x: NaN, y: 0, value: 1 }]), RangeError);
  assert.throws(() => waferTrend([{ x: 0, y: 0, value: 1, weight: 0 }]), RangeError);
});

Deno.test("waferTrend() of values made by a formula finds what is in it and nothing else", () => {
  const { linear, radial, any } = waferTrend(wafer((x) => 1.55 + 1e-4 * x));
  assert.ok(isAnswer(linear) && isAnswer(radial) && isAnswer(any));
  assert.deepEqual([linear.p, radial.p, any.p], [0, 1, 0]);
});

Deno.test("edgeEffect() finds a step at the edge and tells it from a bow", () => {
  const random = randomFrom("edge");
  const radius = 0.03;
  const stepped = edgeEffect(
    wafer((x, y) => (Math.hypot(x, y) >= radius ? 3 : 0) + 0.5 * random.normal()),
    radius,
  ) as EdgeEffect;
  assertClose(stepped.difference, 3, { abs: 4 * stepped.u });
  assert.ok(stepped.p < 1e-6 && isAnswer(stepped.beyondTrend) && stepped.beyondTrend.p < 1e-4);
  const bowed = edgeEffect(
    wafer((x, y) => 3000 * (x * x + y * y) + 0.5 * random.normal()),
    radius,
  ) as EdgeEffect;
  assert.ok(bowed.p < 1e-6 && isAnswer(bowed.beyondTrend) && bowed.beyondTrend.p > 0.01);
});

Deno.test("edgeEffect() compares means as Welch does, and holds its level for unequal scatter", () => {
  // By hand: outer 1, 3 (mean 2, variance 2), inner 0, 0, 3 (mean 1, variance 3): u² = 1 + 1 = 2, t = 1/√2, df = 4/(1/1 + 1/2) = 8/3.
  const sites = [[3, 1], [3, 3], [1, 0], [1, 0], [1, 3]].map(([x, value]) => ({
    x: x!,
    y: 0,
    value: value!,
  }));
  const hand = edgeEffect(sites, 2) as EdgeEffect;
  assertClose(hand.difference, 1, { rel: 1e-14 });
  assertClose(hand.u, Math.SQRT2, { rel: 1e-14 });
  assertClose(hand.df, 8 / 3, { rel: 1e-14 });
  const random = randomFrom("welch");
  let [alarms, step] = [0, 0];
  for (let k = 0; k < 600; k++) {
    const flat = edgeEffect(wafer((x, y) => (Math.hypot(x, y) >= 0.03 ? 3 : 1) * random.normal()), 0.03);
    if (isAnswer(flat) && flat.p < 0.05) alarms++;
    const bowed = edgeEffect(wafer((x, y) => 900 * (x * x + y * y) + random.normal()), 0.03);
    if (isAnswer(bowed) && isAnswer(bowed.beyondTrend) && bowed.beyondTrend.p < 0.05) step++;
  }
  assertClose(alarms / 600, 0.05, { abs: 0.02 });
  assertClose(step / 600, 0.05, { abs: 0.02 });
});

Deno.test("edgeEffect() refuses an edge without dies on either side", () => {
  assert.match((edgeEffect(wafer(() => 1), 1) as { refused: string }).refused, /0 outer and 56 inner/);
  assert.match((edgeEffect(wafer(() => 1), 0.03) as { refused: string }).refused, /do not differ/);
  assert.throws(() => edgeEffect([], 0), RangeError);
});
