import { ok, throws } from "node:assert/strict";
import {
  dutyFactor,
  effectiveLength,
  type Grating,
  gratingSpectrum,
  IDEAL_POWER,
  linearDriftFactor,
  type MismatchProfile,
  missingDomainEfficiency,
  pedestal,
  randomWalkEfficiency,
  randomWallEfficiency,
  realisedEfficiency,
  realiseGrating,
  SINC_SQUARED_WIDTH,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import { type Random, randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

// Recomputed values of section C of the published check values: closed forms after M. M. Fejer, G. A. Magel, D. H. Jundt &
// R. L. Byer, IEEE J. Quantum Electron. 28, 2631 (1992) and S. Helmfrid et al., J. Opt. Soc. Am. B 10, 222 (1993).
const published = JSON.parse(Deno.readTextFileSync("fixtures/check-values/poling.json"));

/** |φ|²/(2/π)² at one Δβ. */
function relative(grating: Grating, deltaBeta: number, profile?: MismatchProfile): number {
  const options = profile === undefined ? {} : { profile };
  const s = gratingSpectrum(grating, { first: deltaBeta, step: 1, count: 1 }, options);
  return (s.re[0]! ** 2 + s.im[0]! ** 2) / IDEAL_POWER;
}

/** The mean over seeded realisations lies within four standard errors of the expected average. */
function assertAverage(
  sample: (random: Random) => number,
  runs: number,
  expected: number,
  what: string,
): void {
  const random = randomFrom(what);
  const values = Float64Array.from({ length: runs }, () => sample(random));
  const error = standardDeviation(values) / Math.sqrt(runs);
  assertClose(mean(values), expected, { abs: 4 * error }, what);
  // The check has teeth: it could see 1 % of the loss, or 10 % of a pedestal.
  ok(
    error < 0.03 * Math.max(1 - expected, expected / 10) || error < 0.04 * expected,
    `${what}: error ${error}`,
  );
}

/** N domains of length 1, walls moved by `shift`, ends fixed. */
function jittered(domains: number, sigma: number, random: Random): Grating {
  const walls = Float64Array.from({ length: domains - 1 }, (_, n) => n + 1 + sigma * random.normal());
  return { walls, start: 0, end: domains, firstSign: 1 };
}

Deno.test("sinc² constants of an ideal grating match the published ones", () => {
  assertClose(SINC_SQUARED_WIDTH, published.sinc2.dkL_fwhm, { rel: 1e-9 });
  assertClose(effectiveLength(SINC_SQUARED_WIDTH / 0.02), 0.02, { rel: 1e-15 });
  const grating = uniformGrating({ start: 0, length: 4000, period: 2 });
  const off = (x: number) => relative(grating, Math.PI + 2 * x / 4000);
  assertClose(off(0), 1, { rel: 1e-9 });
  assertClose(off(published.sinc2.half_argument), 0.5, { abs: 1e-3 });
  assertClose(off(-published.sinc2.half_argument), 0.5, { abs: 1e-3 });
  assertClose(off(published.sinc2.first_sidelobe.argument), published.sinc2.first_sidelobe.level, {
    rel: 3e-3,
  });
  assertClose(off(Math.PI), 0, { abs: 1e-9 });
});

Deno.test("the duty-cycle factor holds for the published duties in first, second and third order", () => {
  for (const { D, ...orders } of published.duty_cycle.values) {
    const grating = uniformGrating({ start: 0, length: 600, period: 2, duty: D });
    for (const m of [1, 2, 3]) {
      assertClose(dutyFactor(D, m) ** 2, orders[`m${m}`], { abs: 6e-9 }, `formula D ${D} order ${m}`);
      assertClose(relative(grating, m * Math.PI), orders[`m${m}`], { abs: 1e-7 }, `walls D ${D} order ${m}`);
    }
  }
});

Deno.test("independent wall errors average to the published efficiencies", () => {
  for (const { sigma_over_l, N, exact } of published.independent_wall_jitter.values) {
    assertClose(randomWallEfficiency(sigma_over_l, N), exact, { abs: 6e-8 });
    const d = (Math.PI * sigma_over_l) ** 2;
    assertClose(Math.exp(-d) + (1 - Math.exp(-d)) / N, exact, { abs: 2 * d / N });
    assertAverage(
      (random) => relative(jittered(N, sigma_over_l, random), Math.PI),
      1500,
      exact,
      `walls off by ${sigma_over_l}`,
    );
  }
});

Deno.test("independent wall errors leave the published pedestal", () => {
  for (const { sigma_over_l, N, dk_l_over_pi, pedestal: level } of published.duty_noise_pedestal.values) {
    const x = dk_l_over_pi * Math.PI;
    assertClose(pedestal(x, sigma_over_l, N), level, { rel: 1e-5 });
    const coherent = relative(jittered(N, 0, randomFrom(0)), x) * Math.exp(-((x * sigma_over_l) ** 2));
    // The mean amplitude of the walls away from the peak is known exactly and is not noise.
    assertAverage(
      (random) => relative(jittered(N, sigma_over_l, random), x),
      1000,
      level + coherent,
      `pedestal ${sigma_over_l} at ${dk_l_over_pi}`,
    );
  }
});

Deno.test("accumulating length errors average to the published efficiencies", () => {
  for (const { N, sigma_over_l, eta } of published.accumulated_length_errors.values) {
    assertClose(randomWalkEfficiency(sigma_over_l, N), eta, { abs: 6e-7 });
    assertAverage(
      (random) => {
        const walls = new Float64Array(N - 1);
        let z = 0;
        for (let n = 0; n < N - 1; n++) walls[n] = z += 1 + sigma_over_l * random.normal();
        // L is the nominal length; the last domain ends where its own error puts it.
        const end = z + 1 + sigma_over_l * random.normal();
        const s = gratingSpectrum({ walls, start: 0, end, firstSign: 1 }, {
          first: Math.PI,
          step: 1,
          count: 1,
        }, {
          poledLength: N,
        });
        return (s.re[0]! ** 2 + s.im[0]! ** 2) / IDEAL_POWER;
      },
      2000,
      eta,
      `walk ${sigma_over_l}`,
    );
  }
});

Deno.test("randomWalkEfficiency() is the double sum of ρ^|j−k|, on both sides of its change of formula", () => {
  for (const n of [1, 2, 300]) {
    for (const a of [0, 1e-9, 0.999e-3 / n, 1.001e-3 / n, 0.1, 3]) {
      let sum = n;
      for (let k = 1; k < n; k++) sum += 2 * (n - k) * Math.exp(-a * k);
      assertClose(
        randomWalkEfficiency(Math.sqrt(2 * a) / Math.PI, n),
        sum / n ** 2,
        { rel: 1e-10 },
        `N ${n}, a ${a}`,
      );
    }
  }
});

Deno.test("missing domains average to the published efficiencies", () => {
  for (const { p, N, eta } of published.missing_inversions.values) {
    assertClose(missingDomainEfficiency(p, N), eta, { abs: 1e-9 });
    assertAverage(
      (random) => relative(realiseGrating({ start: 0, length: N, period: 2, missing: p }, random), Math.PI),
      800,
      eta,
      `missing ${p}`,
    );
  }
});

Deno.test("realiseGrating() averages to the efficiency of its duty, spread and missing domains together", () => {
  for (
    const made of [{ duty: 0.42, dutySd: 0.06, missing: 0.08 }, { duty: 0.55, dutySd: 0.09, missing: 0 }]
  ) {
    // Five standard deviations clear of domains that merge: the closed form has none.
    const realise = (random: Random) => realiseGrating({ ...made, start: 3, length: 800, period: 2 }, random);
    assertAverage(
      (random) => relative(realise(random), Math.PI),
      1500,
      realisedEfficiency(made, 400),
      `${made.duty}`,
    );
  }
  const missingOnly = realisedEfficiency({ duty: 0.5, dutySd: 0, missing: 0.1 }, 500);
  assertClose(missingOnly, missingDomainEfficiency(0.1, 1000), { rel: 1e-12 });
});

Deno.test("a linear drift costs the published Fresnel factor", () => {
  const grating = uniformGrating({ start: 0, length: 2000, period: 2 });
  for (const { phi, eta } of published.linear_chirp_centre.values) {
    const f = linearDriftFactor(phi);
    assertClose(f.re ** 2 + f.im ** 2, eta, { abs: 6e-9 });
    const edge = 4 * phi / 2000;
    const profile = { z: Float64Array.of(0, 2000), delta: Float64Array.of(-edge, edge) };
    assertClose(relative(grating, Math.PI, profile), eta, { abs: 2e-5 }, `walls at phase ${phi}`);
  }
});

Deno.test("linearDriftFactor() tends to the Fresnel integral's limit √(π/4φ)", () => {
  // ∫₀^∞ e^(iφu²) du has the size √(π/φ)/2; the rest beyond 1 is at most 1/(2φ).
  for (const phi of [10, 20]) {
    const f = linearDriftFactor(phi);
    assertClose(Math.hypot(f.re, f.im), Math.sqrt(Math.PI / phi) / 2, { abs: 1 / (2 * phi) });
  }
  // At φ = 20 against a midpoint sum of its own.
  let re = 0;
  let im = 0;
  for (let n = 0; n < 20_000; n++) {
    const u = (n + 0.5) / 20_000;
    re += Math.cos(20 * u * u) / 20_000;
    im += Math.sin(20 * u * u) / 20_000;
  }
  assertClose(linearDriftFactor(20).re, re, { abs: 1e-7 });
  assertClose(linearDriftFactor(20).im, im, { abs: 1e-7 });
});

Deno.test("a sinusoidal drift costs the published J0²", () => {
  const length = 2000;
  const grating = uniformGrating({ start: 0, length, period: 2 });
  const q = 2;
  for (const { arg, eta } of published.sinusoidal.values) {
    const amplitude = arg * 2 * Math.PI * q / length;
    const z = Float64Array.from({ length: 801 }, (_, k) => length * k / 800);
    const delta = z.map((x) => amplitude * Math.sin(2 * Math.PI * q * x / length));
    assertClose(relative(grating, Math.PI, { z, delta }), eta, { abs: 1e-4 }, `argument ${arg}`);
  }
});

Deno.test("closed forms refuse what has no meaning", () => {
  throws(() => dutyFactor(1.2), RangeError);
  throws(() => dutyFactor(0.5, 0), RangeError);
  throws(() => randomWallEfficiency(-1, 3), RangeError);
  throws(() => randomWalkEfficiency(0.1, 2.5), RangeError);
  throws(() => missingDomainEfficiency(NaN, 10), RangeError);
  throws(() => pedestal(0, 0.1, 10), RangeError);
  throws(() => linearDriftFactor(30), RangeError);
  throws(() => effectiveLength(0), RangeError);
  throws(() => realisedEfficiency({ duty: 0.5, dutySd: 0, missing: 2 }, 10), RangeError);
});
