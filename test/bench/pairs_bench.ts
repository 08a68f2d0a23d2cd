// One guide's pair figures: φ is given, then a 128 × 128 joint amplitude, its purity and correlations, and draws of loss.
import {
  assembleFigures,
  given,
  jointAmplitude,
  newPairScratch,
  type PairChain,
  pairSpectrum,
  pairSurvival,
  prepareSource,
  purity,
} from "../../models/pairs/mod.ts";
import { bandCovering } from "../../models/poling/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import { ktpSource } from "../models/pairs/cases.ts";

const POINTS = 128;
const DRAWS = 256;

// the grating's spectrum is another room's work: computed once over a wide band and kept
const base = ktpSource({ grid: { points: POINTS, compare: false } });
const { k } = prepareSource(base);
const kept = base.spectrum(bandCovering(k.mismatch - 4e4, k.mismatch + 4e4, base.length));
const source = { ...base, spectrum: () => kept };
const prepared = prepareSource(source);
const scratch = newPairScratch();
const spectrum = pairSpectrum(source, scratch);
const { amplitude } = jointAmplitude(prepared, POINTS);
const flat = { ...amplitude, re: amplitude.re.slice(), im: amplitude.im.slice() };

const chain: PairChain = {
  guideLength: 0.012,
  poled: [{ from: 0.001, to: 0.011 }],
  losses: { pump: 20, signal: 11.5, idler: 9 },
  signal: { facet: given(0.9), coupling: given(0.8), detector: given(0.85), dark: 100 },
  idler: { facet: given(0.9), coupling: given(0.8), detector: given(0.85), dark: 100 },
  window: 1e-9,
};
const random = randomFrom("bench");
const losses = Array.from({ length: DRAWS }, () => ({
  pump: 20 + random.normal(),
  signal: 11.5 + random.normal(),
  idler: 9 + random.normal(),
}));
// results are summed up and looked at, so that no work can be left out
let sink = 0;

Deno.bench("prepareSource: curves, windows, strength", () => {
  sink += prepareSource(source).gain;
});
Deno.bench("joint amplitude 128 × 128", () => {
  sink += jointAmplitude(prepared, POINTS, scratch.main).amplitude.re[64 * 128 + 64]!;
});
Deno.bench("purity of 128 × 128", () => {
  sink += purity(flat, scratch.gram);
});
Deno.bench("pairSpectrum: all of the above, g2, exchange, bandwidths", () => {
  sink += pairSpectrum(source, scratch).made;
});
Deno.bench("256 draws of survival", () => {
  for (const l of losses) sink += pairSurvival(l, chain.guideLength, chain.poled).signal;
});
Deno.bench("256 draws of all figures upon one spectrum", () => {
  for (const l of losses) {
    sink += assembleFigures(spectrum, source.pump, { ...chain, losses: l }).figures.car.value!;
  }
});
globalThis.addEventListener("unload", () => {
  if (!Number.isFinite(sink)) throw new Error(`Cannot trust the timings: the work gave ${sink}`);
});
