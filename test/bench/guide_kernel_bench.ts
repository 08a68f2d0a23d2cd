// deno bench --frozen test/bench/guide_kernel_bench.ts
// One guide from its walls to its figures: 10,800 jittered walls and a mismatch profile of 256 points → φ on 2,048 Δβ to
// 1e-6 of the peak → 128 × 128 complex joint amplitude → purity → 64 draws of the heralding budget. One thread; below 200
// guides per second the algorithm is wrong.
import {
  assembleBudget,
  given,
  jointAmplitude,
  newPairScratch,
  type PairLosses,
  type PairSource,
  pairSurvival,
  prepareSource,
  pulse,
  purity,
} from "../../models/pairs/mod.ts";
import { type Grating, gratingSpectrum, gratingSpectrumDirect } from "../../models/poling/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import { refractiveIndex } from "../../models/materials/mod.ts";
import { SPEED_OF_LIGHT } from "../../shared/constants.ts";
import { lambdaOf, omegaOf } from "../../shared/units.ts";
import { pulses } from "../models/pairs/cases.ts";

const WALLS = 10_800;
const KNOTS = 256;
const MISMATCHES = 2048;
const POINTS = 128;
const DRAWS = 64;
const GUIDES = 8;

// Type II in congruent lithium niobate, 775 → 2 × 1550 nm, a picosecond pump: 50 mm at a period of some 9 µm.
const omegaP = omegaOf(775e-9);
const wave = (axis: "o" | "e") => (omega: number) =>
  refractiveIndex("CLN", axis, lambdaOf(omega), 60) * omega / SPEED_OF_LIGHT;
const mismatch = wave("o")(omegaP) - wave("o")(omegaP / 2) - wave("e")(omegaP / 2);
const period = 2 * Math.PI / Math.abs(mismatch);
const section = { start: 1e-3, length: WALLS / 2 * period };
const plan: Omit<PairSource, "spectrum"> = {
  omegaP,
  omegaS: omegaP / 2,
  omegaI: omegaP / 2,
  kP: wave("o"),
  kS: wave("o"),
  kI: wave("e"),
  samePolarisation: false,
  d: 4.4e-12,
  effectiveArea: 60e-12,
  length: section.length,
  pump: pulses(pulse("gaussian", 1e-12, 775e-9)),
};

interface BenchGuide {
  readonly grating: Grating;
  readonly profile: { readonly z: Float64Array; readonly delta: Float64Array };
  readonly losses: readonly PairLosses[];
}

/** A guide of the bench: every wall and every knot of the profile has its own error. */
function benchGuide(seed: number): BenchGuide {
  const random = randomFrom(`guide kernel ${seed}`);
  const { start, length } = section;
  const walls = Float64Array.from(
    { length: WALLS },
    (_, j) => start + (j / 2 + 0.25) * period + 0.02 * period * random.normal(),
  );
  return {
    grating: { walls, start, end: start + length, firstSign: 1 },
    profile: {
      z: Float64Array.from({ length: KNOTS }, (_, k) => start + length * k / (KNOTS - 1)),
      delta: Float64Array.from({ length: KNOTS }, () => 10 * random.normal()),
    },
    losses: Array.from({ length: DRAWS }, () => ({
      pump: 20 + random.normal(),
      signal: 11.5 + random.normal(),
      idler: 9 + random.normal(),
    })),
  };
}

const scratch = newPairScratch();
const step = 2 * Math.PI / 8 / section.length;
const band = { first: mismatch - MISMATCHES / 2 * step, step, count: MISMATCHES };

/** The whole kernel. @returns a number that depends on every part of it */
function kernel({ grating, profile, losses }: BenchGuide): number {
  const spectrum = gratingSpectrum(grating, band, { profile });
  const source: PairSource = { ...plan, spectrum: () => spectrum };
  const { amplitude, signal, idler } = jointAmplitude(prepareSource(source), POINTS, scratch.main);
  if (signal.omega.length !== POINTS || idler.omega.length !== POINTS) {
    throw new Error(`Cannot time the kernel: its grid is ${signal.omega.length} × ${idler.omega.length}`);
  }
  let sum = purity(amplitude, scratch.gram);
  const poled = [{ from: grating.start, to: grating.end }];
  for (const loss of losses) {
    const { signalGivenIdler } = pairSurvival(loss, section.length + 2e-3, poled);
    sum += assembleBudget({
      survival: given(signalGivenIdler),
      facet: given(0.86),
      coupling: given(0.8),
      filter: given(0.95),
      detector: given(0.85),
    }).total.value!;
  }
  return sum;
}

const guides = Array.from({ length: GUIDES }, (_, seed) => benchGuide(seed));

/** A fast kernel that is wrong is worth nothing: some of its 2,048 points against the plain integral. */
function checkSpectrum({ grating, profile }: BenchGuide): void {
  const fast = gratingSpectrum(grating, band, { profile });
  let peak = 0;
  for (let k = 0; k < MISMATCHES; k++) peak = Math.max(peak, Math.hypot(fast.re[k]!, fast.im[k]!));
  for (let k = 0; k < MISMATCHES; k += 64) {
    const one = gratingSpectrumDirect(grating, { first: band.first + k * step, step, count: 1 }, { profile });
    const error = Math.hypot(fast.re[k]! - one.re[0]!, fast.im[k]! - one.im[0]!) / peak;
    if (!(error < 1e-6)) throw new Error(`Cannot trust the timings: φ is off by ${error} of its peak`);
  }
}
checkSpectrum(guides[0]!);

// Warm: the compiler has seen every path before anything is timed. What is computed is summed up and looked at.
let sink = 0;
for (let n = 0; n < 25 * GUIDES; n++) sink += kernel(guides[n % GUIDES]!);

// One guide an iteration: iter/s is guides per second and core.
let next = 0;
Deno.bench("a guide from its walls to its heralding budget", { group: "kernel", baseline: true }, () => {
  sink += kernel(guides[next++ % GUIDES]!);
});
Deno.bench("of it, φ on 2,048 Δβ", { group: "kernel" }, () => {
  const { grating, profile } = guides[next++ % GUIDES]!;
  sink += gratingSpectrum(grating, band, { profile }).re[7]!;
});
globalThis.addEventListener("unload", () => {
  if (!Number.isFinite(sink)) throw new Error(`Cannot trust the timings: the work gave ${sink}`);
});
