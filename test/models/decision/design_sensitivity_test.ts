import { equal, ok } from "node:assert/strict";
import {
  matchingPeriod,
  nonCriticalWidths,
  nudgeEffects,
  operatingPoints,
  type PlatformModel,
} from "../../../models/decision/mod.ts";
import { mismatch } from "../../../models/guides/mod.ts";
import type { GuideGeometry, ThreeWaves } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";
import { ktp } from "./a_guide.ts";
import { doubling, solvedPlatform, TYPE_TWO } from "./solved_guide.ts";

const DOUBLING = doubling(1550, "TM");
const titanium = solvedPlatform("ti-ln-zcut", 7, [DOUBLING]).model;
const rubidium = solvedPlatform("rb-ktp-zcut", 3, [TYPE_TWO]).model;
const STRIP = { width_um: 7, titanium_nm: 100 };

/** Temperature that a guide matches at with a period (m). */
function temperatureOf(
  model: PlatformModel,
  waves: ThreeWaves,
  geometry: GuideGeometry,
  period: number,
): number {
  const points = operatingPoints(model, {
    waves,
    oven: [15, 130],
    tunable: null,
    geometry,
    period,
    poledLength: 0.016,
    walls: null,
  });
  if ("reason" in points) throw new Error(points.reason);
  const found = points.at(0);
  ok(found.matched);
  return found.temperatureC;
}

Deno.test("a width or thickness error moves centre and temperature of operation by the stated sensitivity", () => {
  const point = { waves: DOUBLING, process: "second-harmonic" as const, geometry: STRIP, temperatureC: 60 };
  const period = matchingPeriod(titanium, point);
  assertClose(temperatureOf(titanium, DOUBLING, STRIP, period), 60, { abs: 1e-6 });
  const effects = nudgeEffects(titanium, point);
  for (const [parameter, by] of [["width_um", 0.1], ["titanium_nm", 1]] as const) {
    const effect = effects.find((e) => e.parameter === parameter)!;
    equal(effect.by, by);
    const made = { ...STRIP, [parameter]: STRIP[parameter] + by };
    const before = mismatch(titanium.index, DOUBLING, 60, STRIP);
    assertClose(mismatch(titanium.index, DOUBLING, 60, made) - before, effect.deltaBeta, { rel: 1e-9 });
    assertClose(
      temperatureOf(titanium, DOUBLING, made, period) - 60,
      effect.temperatureC!,
      { rel: 0.05 },
      parameter,
    );
    // The guide as made has the mismatch of the drawn one at the wavelength that the centre moved to.
    const lambda = DOUBLING.lambdaS + effect.centre!;
    const there = mismatch(
      titanium.index,
      { ...DOUBLING, lambdaP: lambda / 2, lambdaS: lambda, lambdaI: lambda },
      60,
      made,
    );
    assertClose(there, before, { abs: 0.03 * Math.abs(effect.deltaBeta) }, parameter);
    const area = (g: GuideGeometry) => titanium.area.effectiveArea("TM>TM+TM", g, DOUBLING);
    assertClose(effect.efficiency!, area(STRIP) / area(made) - 1, { abs: 1e-3 });
  }
  const names = effects.map((e) => e.parameter);
  ok(names.includes("diffusion_depth_um") && !names.includes("etch_depth_nm"));
  assertClose(effects.find((e) => e.parameter === "temperature_c")!.deltaBeta, 65, { rel: 0.1 });
});

Deno.test("where the width is non-critical to first order, Δβ has a turning point, and both signs of an error are told", () => {
  const point = {
    waves: TYPE_TWO,
    process: "second-harmonic" as const,
    geometry: { width_um: 3 },
    temperatureC: 50,
  };
  const { widths, range_um } = nonCriticalWidths(rubidium, point);
  equal(widths.length, 1);
  const { width_um, curvature } = widths[0]!;
  ok(range_um![0] <= width_um && width_um <= range_um![1]);
  const at = (width_um: number) => mismatch(rubidium.index, TYPE_TWO, 50, { width_um });
  const turn = at(width_um);
  for (const off of [-0.2, -0.1, 0.1, 0.2]) ok(at(width_um + off) < turn - 10 * off ** 2, `${off} µm`);
  // What is left there is half of the curvature times the square of the error.
  for (const off of [-0.05, 0.05]) {
    assertClose(at(width_um + off) - turn, curvature / 2 * off ** 2, { rel: 0.1 }, `${off} µm`);
  }
  const effects = nudgeEffects(rubidium, point).filter((e) => e.parameter === "width_um");
  equal(effects.map((e) => e.by).join(), "0.1,-0.1");
  assertClose(effects[1]!.deltaBeta, at(2.9) - at(3), { rel: 1e-9 });
});

Deno.test("bulk has a temperature sensitivity alone; near degenerate type II the centre follows Δβ's curvature", () => {
  const point = {
    waves: TYPE_TWO,
    process: "second-harmonic" as const,
    geometry: { width_um: 5 },
    temperatureC: 25,
  };
  const effects = nudgeEffects(ktp, point);
  equal(effects.length, 1);
  const { centre, deltaBeta } = effects[0]!;
  // Degenerate type II is near its turning point in wavelength: the slope alone would send the centre 137 nm away.
  const at = (lambda: number) =>
    mismatch(ktp.index, { ...TYPE_TWO, lambdaP: lambda / 2, lambdaS: lambda, lambdaI: lambda }, 25, {
      width_um: 5,
    });
  assertClose(at(TYPE_TWO.lambdaS + centre!) - at(TYPE_TWO.lambdaS), -deltaBeta, { rel: 0.02 });
  ok(Math.abs(centre!) < 10e-9);
  assertClose(deltaBeta, -10.3, { rel: 0.02 });
  equal(nonCriticalWidths(ktp, point).range_um, null);
});
