import { deepEqual, equal, ok } from "node:assert/strict";
import {
  type GuideInputs,
  matchingPeriod,
  mismatchProfile,
  nudgeEffects,
  parameterSlope,
  predictGuide,
} from "../../../models/decision/mod.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, request } from "./a_guide.ts";
import { doubling, solvedPlatform } from "./solved_guide.ts";

const waves = doubling(1550, "TM");
const { model } = solvedPlatform("ti-ln-zcut", 7, [waves]);
const geometry = { width_um: 7, titanium_nm: 100 };
const point = { waves, process: "second-harmonic" as const, geometry, temperatureC: 60 };
const checked = request({
  process: "second-harmonic",
  polarisations: { pump: "TM", signal: "TM", idler: "TM" },
  signal: { wavelength_nm: 1550, average_power_mw: 10 },
  oven_c: [20, 120],
});
const lossless = { value: 0, u: 0, basis: "die" as const, key: "none" };
const LENGTH = 0.016;
const strip: GuideInputs = {
  ...guide,
  geometry,
  length: 0.018,
  poledFrom: 0.001,
  poledLength: LENGTH,
  period: matchingPeriod(model, point),
  pumpLoss: lossless,
  signal: { ...guide.signal, loss: lossless },
  idler: { ...guide.idler, loss: lossless },
};
const figure = (inputs: GuideInputs, name: string) =>
  predictGuide(model, checked, inputs, { recorded: null }).figures.find((f) => f.figure === name)!.mean!;

Deno.test("deviations along a guide become mismatch by their sensitivities, linear between the places and constant beyond", () => {
  const along = [
    { parameter: "width_um" as const, z: [0.002, 0.006], deviation: [-0.1, 0.1] },
    { parameter: "titanium_nm" as const, z: [0.004, 0.008], deviation: [1, -1] },
    { parameter: "etch_depth_nm" as const, z: [0.003, 0.004], deviation: [5, 6] },
  ];
  const profile = mismatchProfile(along, (p) => p === "width_um" ? 2000 : p === "titanium_nm" ? 300 : 0)!;
  deepEqual([...profile.z], [0.002, 0.004, 0.006, 0.008]);
  [-200 + 300, 0 + 300, 200 + 0, 200 - 300].forEach((x, k) =>
    assertClose(profile.delta[k]!, x, { abs: 1e-9 })
  );
  equal(mismatchProfile(along, () => 0), undefined);
});

Deno.test("a taper lowers the peak as the integral of its phase says", () => {
  const per = parameterSlope(model, point, "width_um");
  const along = [{ parameter: "width_um" as const, z: [0.001, 0.017], deviation: [-0.12, 0.12] }];
  // |∫ e^(i s x²/2) dx / L|² over the poled length, s the slope of δβ: the taper is symmetric, so its peak is in the middle.
  const s = 2 * 0.12 * per / LENGTH;
  const steps = 4000;
  let [re, im] = [0, 0];
  for (let k = 0; k < steps; k++) {
    const x = LENGTH * ((k + 0.5) / steps - 0.5);
    re += Math.cos(s * x * x / 2) / steps;
    im += Math.sin(s * x * x / 2) / steps;
  }
  const expected = re * re + im * im;
  ok(expected < 0.95, `a taper that can be seen: ${expected}`);
  const [with_, without] = [
    figure({ ...strip, along }, "efficiency_percent_per_w"),
    figure(strip, "efficiency_percent_per_w"),
  ];
  assertClose(with_ / without, expected, { rel: 5e-3 });
  assertClose(figure({ ...strip, along }, "operating_temperature_c"), 60, { abs: 0.05 });
});

Deno.test("a part that is wider than the mean moves the temperature as a wider guide does", () => {
  const width = nudgeEffects(model, point).find((e) => e.parameter === "width_um")!;
  // Read as 0.05 µm wider all along the poled section: no more and no less than a guide of that width.
  const along = [{ parameter: "width_um" as const, z: [0.001, 0.017], deviation: [0.05, 0.05] }];
  const moved = figure({ ...strip, along }, "operating_temperature_c") - 60;
  assertClose(moved, width.temperatureC! / 2, { rel: 0.05 });
  assertClose(
    moved,
    figure({ ...strip, geometry: { ...geometry, width_um: 7.05 } }, "operating_temperature_c") - 60,
    {
      abs: 0.05,
    },
  );
});
