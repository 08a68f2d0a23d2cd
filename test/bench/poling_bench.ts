// deno bench --frozen test/bench/poling_bench.ts
import {
  bandCovering,
  bandForPeak,
  gratingSpectrum,
  interpolateSpectrumInto,
  peakTemperatures,
  phaseMatchingTemperatures,
  realiseGrating,
} from "../../models/poling/mod.ts";
import { randomFrom } from "../../shared/random.ts";

const period = 9.26e-6;
const vector = 2 * Math.PI / period;
const length = 5400 * period;
const statistics = { start: 1e-3, length, period, dutySd: 0.04, missing: 0.01 };
const grating = realiseGrating({ ...statistics, missing: 0 }, randomFrom(1));
const step = 2 * Math.PI / 8 / length;
const band = { first: vector - 1024 * step, step, count: 2048 };
const profile = { z: Float64Array.of(0, 0.02, 0.051), delta: Float64Array.of(-300, 200, 400) };
const spectrum = gratingSpectrum(grating, band);
const points = Float64Array.from({ length: 65_536 }, (_, k) => vector + (k / 65_536 - 0.5) * 2000 * step);
const re = new Float64Array(points.length);
const im = new Float64Array(points.length);
const mismatch = (t: number) => vector + 60 * (t - 55);
const around = gratingSpectrum(grating, bandForPeak(mismatch(20), mismatch(90), period, length));
// Whatever is measured is added up, so that none of it can be left out.
let kept = 0;

Deno.bench(`transform of ${grating.walls.length} walls to 2048 points`, () => {
  kept += gratingSpectrum(grating, band).re[7]!;
});
Deno.bench("the same with loss", () => {
  kept += gratingSpectrum(grating, band, { decay: 5 }).re[7]!;
});
Deno.bench("the same with a mismatch profile of 700 1/m", () => {
  kept += gratingSpectrum(grating, band, { profile }).re[7]!;
});
Deno.bench("transform to 160 points around the peak", () => {
  kept += gratingSpectrum(grating, bandCovering(vector - 75 * step, vector + 75 * step, length)).re[7]!;
});
Deno.bench("realisation of 5400 inverted domains", () => {
  kept += realiseGrating(statistics, randomFrom(2)).walls[7]!;
});
Deno.bench("interpolation of 65,536 points", () => {
  interpolateSpectrumInto(spectrum, points, re, im);
  kept += re[7]!;
});
Deno.bench("phase-matching temperature", () => {
  kept += phaseMatchingTemperatures(mismatch, () => vector, [20, 90]).nearest;
});
Deno.bench("temperature of the peak, spectrum given", () => {
  kept += peakTemperatures(around, mismatch, [20, 90]).nearest;
});
globalThis.addEventListener("unload", () => {
  if (!Number.isFinite(kept)) throw new RangeError(`Cannot trust the timings: their sum is ${kept}`);
});
