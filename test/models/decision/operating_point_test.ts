import { deepEqual, equal, ok } from "node:assert/strict";
import { assert, double, property } from "fast-check";
import {
  type OperatingPoint,
  operatingPoints,
  type OperatingQuestion,
} from "../../../models/decision/mod.ts";
import { gratingFromWalls, uniformGrating } from "../../../models/poling/mod.ts";
import { assertClose } from "../../assert_close.ts";
import { KTP, mismatch, peakTemperature, rootTemperature, type Waves } from "../../second_opinion.ts";
import { ktp } from "./a_guide.ts";

const WAVES = {
  lambdaP: 791e-9,
  lambdaS: 1582e-9,
  lambdaI: 1582e-9,
  polP: "TE",
  polS: "TE",
  polI: "TM",
} as const;
const SECOND: Waves = { p: 791e-9, s: 1582e-9, i: 1582e-9, pol: { p: "TE", s: "TE", i: "TM" } };
const scaled = (lambdaP: number): Waves => ({ ...SECOND, p: lambdaP, s: 2 * lambdaP, i: 2 * lambdaP });

const asked = (over: Partial<OperatingQuestion> = {}): OperatingQuestion => ({
  waves: WAVES,
  oven: [20, 90],
  tunable: null,
  geometry: { width_um: 3 },
  period: 46.05e-6,
  poledLength: 0.007,
  walls: null,
  ...over,
});

function at(over: Partial<OperatingQuestion> = {}, offset = 0): OperatingPoint {
  const points = operatingPoints(ktp, asked(over));
  if ("reason" in points) throw new Error(points.reason);
  return points.at(offset);
}

Deno.test("the operating temperature is the root of |Δβ| = 2π/Λ, whatever the sign of Δβ, with expansion", () => {
  ok(mismatch(KTP, SECOND, 25) < 0);
  assert(
    property(double({ min: 45.8, max: 46.15, noNaN: true }), (periodUm) => {
      const point = at({ period: periodUm * 1e-6 });
      assertClose(point.temperatureC, rootTemperature(KTP, SECOND, periodUm, [20, 90])!, { abs: 1e-4 });
      deepEqual([point.matched, point.tuned, point.waves], [true, false, WAVES]);
    }),
    { numRuns: 12 },
  );
});

Deno.test("an offset of Δβ moves the root to where the sum matches", () => {
  const offset = -60;
  const { temperatureC } = at({}, offset);
  const sum = Math.abs(mismatch(KTP, SECOND, temperatureC) + offset);
  assertClose(sum, 2 * Math.PI / (46.05e-6 * KTP.stretch(temperatureC)), { rel: 1e-9 });
  ok(Math.abs(temperatureC - at().temperatureC) > 1);
});

Deno.test("without a root the nearer end of the oven is reported, unmatched", () => {
  for (const [periodUm, end] of [[46.9, 20], [45.5, 90]] as const) {
    const point = at({ period: periodUm * 1e-6 });
    deepEqual([point.matched, point.temperatureC, point.others], [false, end, []]);
  }
});

Deno.test("with all walls known the peak of |φ|² decides, not the design's period", () => {
  const periodUm = 46.05;
  const stretched = uniformGrating({ start: 5e-4, length: 0.007, period: periodUm * 1.0002e-6, duty: 0.48 });
  const walls = gratingFromWalls(stretched.walls, {
    poledFrom: 5e-4,
    poledLength: 0.007,
    period: periodUm * 1e-6,
    guideLength: 0.008,
  });
  const point = at({ walls });
  const domains = { edges: [walls.start, ...walls.walls, walls.end], poled: 0.007 };
  assertClose(point.temperatureC, peakTemperature(KTP, SECOND, domains, [20, 90]), { abs: 2e-3 });
  assertClose(
    point.temperatureC,
    rootTemperature(KTP, SECOND, periodUm * 1.0002, [20, 90])!,
    { abs: 0.5 },
    "near the root of the walls' own period",
  );
  ok(Math.abs(point.temperatureC - at().temperatureC) > 1);
  // A peak that the oven's edge cuts off is none.
  equal(at({ walls, oven: [60, 90] }).matched, false);
});

Deno.test("the pump is tuned only without a root at its nominal wavelength, to the nearest that has one", () => {
  // Away from 1582 nm, where a pump that is tuned takes signal and idler along without moving Δβ.
  const waves = { ...WAVES, lambdaP: 775e-9, lambdaS: 1550e-9, lambdaI: 1550e-9 };
  const periodFor = (lambdaP: number, T: number) =>
    2e6 * Math.PI / (Math.abs(mismatch(KTP, scaled(lambdaP), T)) * KTP.stretch(T));
  let tested = 0;
  const tunable = [773e-9, 777e-9] as const;
  const held = at({ waves, tunable, period: periodFor(775e-9, 45) * 1e-6 });
  deepEqual([held.tuned, held.waves], [false, waves]);
  // Where in the oven each pump wavelength matches decides which is the nearest: those that match at its edges.
  for (const [edge, wanted] of [[20, 774.2e-9], [20, 775.9e-9], [90, 774.2e-9], [90, 775.9e-9]] as const) {
    const period = periodFor(wanted, edge);
    if (rootTemperature(KTP, scaled(775e-9), period, [20, 90]) !== null) continue;
    const point = at({ waves, tunable, period: period * 1e-6 });
    deepEqual([point.matched, point.tuned], [true, true]);
    const { lambdaP, lambdaS, lambdaI } = point.waves;
    assertClose(lambdaP, wanted, { abs: 1e-12 }, `${edge} °C`);
    assertClose(point.temperatureC, edge, { abs: 0.1 });
    assertClose(lambdaS / lambdaP, 2, { rel: 1e-12 }, "ω_s/ω_p is kept");
    assertClose(1 / lambdaS + 1 / lambdaI, 1 / lambdaP, { rel: 1e-12 }, "energy is kept");
    // Out of reach of the laser, or of no tunable laser, there is nothing.
    const near = Math.abs(wanted - 775e-9) / 2;
    equal(at({ waves, tunable: [775e-9 - near, 775e-9 + near], period: period * 1e-6 }).matched, false);
    equal(at({ waves, period: period * 1e-6 }).matched, false);
    tested++;
  }
  ok(tested >= 2, "one wavelength on either side");
});

Deno.test("an oven or a wavelength beyond the indices is answered with the range", () => {
  const cold = operatingPoints(ktp, asked({ oven: [-50, 0] }));
  ok("reason" in cold && /oven \(-50–0 °C\).*5–250 °C/.test(cold.reason));
  const blue = operatingPoints(
    ktp,
    asked({ waves: { ...WAVES, lambdaP: 430e-9, lambdaS: 860e-9, lambdaI: 860e-9 } }),
  );
  ok("reason" in blue && /pump wavelength 430\.0 nm.*450–3500 nm/.test(blue.reason));
  // An oven that reaches beyond is used as far as the index goes.
  assertClose(at({ oven: [-50, 90] }).temperatureC, at().temperatureC, { abs: 1e-6 });
});
