import { deepEqual, ok, throws } from "node:assert/strict";
import {
  addProfiles,
  bandCovering,
  envelopeCurves,
  type Grating,
  gratingEnvelope,
  gratingSpectrum,
  gratingSpectrumDirect,
  IDEAL_POWER,
  mismatchSteps,
  realiseGrating,
  realiseMismatch,
  SINC_SQUARED_WIDTH,
  stepPhases,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { meanTuningCurve } from "../../../models/metrology/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

const [start, length, period, ell] = [1e-3, 20e-3, 17e-6, 1e-3];
const vector = 2 * Math.PI / period;
const steps = mismatchSteps(length, ell);
const at = { start, length, correlationLength: ell };

/** |φ|² at one Δβ by the plain integral. */
function power(
  grating: Grating,
  deltaBeta: number,
  profile?: { readonly z: Float64Array; readonly delta: Float64Array },
): number {
  const { re, im } = gratingSpectrumDirect(
    grating,
    { first: deltaBeta, step: 1, count: 1 },
    profile === undefined ? {} : { profile },
  );
  return re[0]! ** 2 + im[0]! ** 2;
}

Deno.test("realisations have the standard deviation and the exponential correlation that were asked", () => {
  const random = randomFrom("a walk");
  const runs = 4000;
  const lag = 6;
  let [mean, variance, together] = [0, 0, 0];
  for (let n = 0; n < runs; n++) {
    const { delta } = realiseMismatch({ ...at, sd: 300 }, random);
    mean += delta[40]! / runs;
    variance += delta[40]! ** 2 / runs;
    together += delta[40]! * delta[40 + lag]! / runs;
  }
  // Standard errors: sd/√n, sd²√(2/n) and at most the latter again.
  const spread = 300 ** 2 * Math.sqrt(2 / runs);
  assertClose(mean, 0, { abs: 4 * 300 / Math.sqrt(runs) });
  assertClose(variance, 300 ** 2, { abs: 4 * spread });
  assertClose(together, 300 ** 2 * Math.exp(-lag * length / steps / ell), { abs: 4 * spread });
});

Deno.test("one seed gives one shape, of any standard deviation", () => {
  const one = realiseMismatch({ ...at, sd: 1 }, randomFrom(5));
  const many = realiseMismatch({ ...at, sd: 250 }, randomFrom(5));
  deepEqual([...many.z], [...one.z]);
  for (const k of [0, 17, steps]) assertClose(many.delta[k]!, 250 * one.delta[k]!, { rel: 1e-12 });
  throws(() => realiseMismatch({ ...at, sd: -1 }, randomFrom(5)), RangeError);
  throws(() => mismatchSteps(1, 1e-4), /at most 1024 correlation lengths/);
});

Deno.test("an envelope is the grating's own φ around its Δβ, with and without a realisation on it", () => {
  const windows = [
    { centre: 3e-3, duty: 0.4, dutySd: 0.03, missing: 0.1 },
    { centre: 18e-3, duty: 0.6, dutySd: 0.03, missing: 0 },
  ];
  for (
    const grating of [
      uniformGrating({ start, length, period }),
      realiseGrating({ start, length, period, windows }, randomFrom("g")),
    ]
  ) {
    const known = { z: Float64Array.of(2e-3, 20e-3), delta: Float64Array.of(-80, 120) };
    const profile = realiseMismatch({ ...at, sd: 300 }, randomFrom("r"));
    const curve = envelopeCurves(gratingEnvelope(grating, vector + 50, steps, { profile: known }))(
      stepPhases(profile),
    );
    const both = addProfiles(profile, known);
    for (const x of [-700, -150, 0, 60, 333]) {
      assertClose(curve.power(x), power(grating, vector + 50 + x, both), { abs: 2e-3 * IDEAL_POWER });
    }
    // The highest point is the highest of the true curve, and shifting the mismatch moves it by as much.
    assertClose(curve.peak.power, power(grating, vector + 50 + curve.peak.at, both), {
      abs: 2e-3 * IDEAL_POWER,
    });
    const moved = addProfiles(profile, known, curve.peak.at);
    assertClose(power(grating, vector + 50, moved), curve.peak.power, { abs: 2e-3 * IDEAL_POWER });
  }
  const ideal = envelopeCurves(gratingEnvelope(uniformGrating({ start, length, period }), vector, steps))();
  assertClose(ideal.width!, SINC_SQUARED_WIDTH / length, { rel: 2e-3 });
  assertClose(ideal.peak.power, IDEAL_POWER, { rel: 1e-3 });
});

Deno.test("a mismatch that varies takes its height from the peak and leaves the area of |φ|² as it is", () => {
  const grating = uniformGrating({ start, length, period });
  // Parseval: ∫|φ|² dΔβ over one order is 2π/L·(2/π)²; of what lies beyond ±15000 1/m the sinc² tail is 2/(L·15000)·….
  const band = bandCovering(vector - 15e3, vector + 15e3, length);
  const area = (profile: ReturnType<typeof realiseMismatch>) => {
    const { re, im } = gratingSpectrum(grating, band, { profile });
    let sum = 0;
    for (let k = 0; k < re.length; k++) sum += (re[k]! ** 2 + im[k]! ** 2) * band.step;
    return sum;
  };
  const peaks: number[] = [];
  for (const sd of [0, 150, 400, 800]) {
    const profile = realiseMismatch({ ...at, sd }, randomFrom("conserved"));
    assertClose(area(profile), 2 * Math.PI / length * IDEAL_POWER, { rel: 0.01 });
    const curve = envelopeCurves(gratingEnvelope(grating, vector, steps))(stepPhases(profile));
    peaks.push(curve.peak.power);
  }
  for (let k = 1; k < peaks.length; k++) ok(peaks[k]! < peaks[k - 1]!, `${peaks}`);
});

Deno.test("the mean curve of realisations less their means is the closed form's; peaks brought together stand higher", () => {
  const curves = envelopeCurves(gratingEnvelope(uniformGrating({ start, length, period }), vector, steps));
  for (const sd of [150, 400]) {
    const closed = meanTuningCurve(ell / length)(sd * length);
    const runs = 600;
    const phases = [0, 2, 4, 7, 12];
    const powers = phases.map(() => [] as number[]);
    let normalised = 0;
    const random = randomFrom(`mean ${sd}`);
    for (let n = 0; n < runs; n++) {
      const profile = realiseMismatch({ ...at, sd }, random);
      const theta = stepPhases(profile);
      // The mean of a piecewise linear profile, by the trapezium rule.
      const mean = profile.delta.reduce((sum, d, k) => sum + d * (k === 0 || k === steps ? 0.5 : 1), 0) /
        steps;
      const curve = curves(theta);
      phases.forEach((phase, i) => powers[i]!.push(curve.power(phase / length - mean) / IDEAL_POWER));
      normalised += curve.peak.power / IDEAL_POWER / runs;
    }
    powers.forEach((values, i) => {
      const mean = values.reduce((a, b) => a + b, 0) / runs;
      const se = Math.sqrt(values.reduce((a, b) => a + (b - mean) ** 2, 0)) / runs;
      assertClose(mean, closed(phases[i]!), { abs: 4 * se + 5e-3 });
    });
    const centre = powers[0]!.reduce((a, b) => a + b, 0) / runs;
    ok(normalised > centre, `sd ${sd}: peaks ${normalised}, at the mean ${centre}`);
  }
});
