// deno bench --frozen test/bench/spread_bench.ts
// What a spread of the mismatch costs: one guide's whole prediction (256 draws, 16 spectra) of pulsed pairs from a grating of
// 780 walls, without one, with one, and with one that has to look like the guide's own scan; and telling one from a scan.
import { type GuideInputs, predictGuide } from "../../models/decision/mod.ts";
import { fitTuningScan, isRefused, mismatchSpread } from "../../models/metrology/mod.ts";
import { newPairScratch } from "../../models/pairs/mod.ts";
import {
  envelopeCurves,
  gratingEnvelope,
  mismatchSteps,
  realiseMismatch,
  stepPhases,
  uniformGrating,
} from "../../models/poling/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import { guide, ktp, request, trait, TYPE_II } from "../models/decision/a_guide.ts";

const pairs = request({
  process: "pair-generation",
  polarisations: TYPE_II,
  pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
  signal: { wavelength_nm: 1582, filter: { shape: "flat-top", fwhm_nm: 12, peak: 0.97 } },
  idler: {},
});
const { poledFrom: start, poledLength: length, period } = guide;
const grating = uniformGrating({ start, length, period });
const inspected: GuideInputs = {
  ...guide,
  pumpLoss: trait(0.5, 0.05, "pump loss"),
  poling: { from: "walls", walls: grating.walls, basis: "measured" },
};
const spread = { sd: trait(250, 80, "sd"), correlationLength: 1e-3, scanned: null };
const waves = {
  lambdaP: 791e-9,
  lambdaS: 1582e-9,
  lambdaI: 1582e-9,
  polP: "TE",
  polS: "TE",
  polI: "TM",
} as const;
const scanned = {
  ...spread,
  scanned: { waves, effectiveLength: trait(17.5, 0.3, "length"), peakKept: trait(0.85, 0.05, "kept") },
};
const cases: readonly (readonly [string, GuideInputs])[] = [
  ["walls", inspected],
  ["walls and a spread", { ...inspected, mismatchSpread: spread }],
  ["walls and a spread like its scan", { ...inspected, mismatchSpread: scanned }],
  ["statistics of the poling", guide],
  ["statistics and a spread", { ...guide, mismatchSpread: spread }],
];
const scratch = newPairScratch();
// Whatever is measured is added up, so that none of it can be left out.
let kept = 0;
for (const [name, inputs] of cases) {
  Deno.bench(`a guide from ${name}`, { group: "guide", baseline: name === "walls" }, () => {
    kept += predictGuide(ktp, pairs, inputs, { recorded: null, scratch }).probability;
  });
}

const vector = 2 * Math.PI / period;
const envelope = gratingEnvelope(grating, vector, mismatchSteps(length, 1e-3));
const curve = envelopeCurves(envelope)(
  stepPhases(realiseMismatch({ start, length, sd: 250, correlationLength: 1e-3 }, randomFrom("bench"))),
);
const points = Array.from({ length: 61 }, (_, k) => {
  const x = curve.peak.at + (k - 30) * 45;
  return { x, power: curve.power(x) };
});
const fit = fitTuningScan(points);
if (isRefused(fit)) throw new Error(`Cannot time a scan that is refused: ${fit.refused}`);
const offsets = Float64Array.from(points, (p) => p.x - fit.centre.value);
Deno.bench("a spread from a scan of 61 points", () => {
  const told = mismatchSpread(offsets, fit, envelope, 1e-3);
  kept += isRefused(told) ? 1 : told.sd.value;
});
globalThis.addEventListener("unload", () => {
  if (!Number.isFinite(kept)) throw new Error(`Cannot trust the timings: the work gave ${kept}`);
});
