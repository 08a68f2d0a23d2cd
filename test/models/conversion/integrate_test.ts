import { throws } from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  depletedSecondHarmonic,
  equivalentKernel,
  FIRST_ORDER,
  integrateDomains,
  integrateUniform,
  type LitGuide,
  lossyUniform,
  mixingWeight,
  omegas,
  peakConversion,
  secondHarmonicWeight,
  undepletedDifferenceFrequency,
  undepletedSumFrequency,
  type WaveValues,
} from "../../../models/conversion/mod.ts";
import type { Grating } from "../../../models/poling/grating.ts";
import { randomFrom } from "../../../shared/random.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";

const PERIOD = 18e-6;
const K = 2 * Math.PI / PERIOD;
const NO_LOSS: WaveValues = { p: 0, s: 0, i: 0 };
const LOSSY: WaveValues = { p: 9, s: 3, i: 5 };

function waves(lambdaS: number, lambdaI: number): ThreeWaves {
  return {
    lambdaP: 1 / (1 / lambdaS + 1 / lambdaI),
    lambdaS,
    lambdaI,
    polP: "TM",
    polS: "TM",
    polI: "TM",
  };
}
const MIX = waves(1.95e-6, 1.55e-6);
const TWICE = waves(1.55e-6, 1.55e-6);

/** A guide whose sum-frequency prefactor (1/(W·m²)) is given; four times that of the second harmonic. */
function guide(w: ThreeWaves, sumPrefactor: number, power: Partial<WaveValues>, alpha = NO_LOSS): LitGuide {
  const o = omegas(w);
  return {
    waves: w,
    coupling: Math.sqrt(sumPrefactor * o.s * o.i / o.p),
    alpha,
    power: { p: 0, s: 0, i: 0, ...power },
    guideLength: 0.012,
  };
}

/** Alternate domains of half a period, every wall moved by a normal error. */
function grating(start: number, end: number, wallSd = 0, seed = 1, drift = 0): Grating {
  const random = randomFrom(seed);
  const walls: number[] = [];
  for (let k = 1; start + k * PERIOD / 2 < end - PERIOD / 4; k++) {
    const z = k * PERIOD / 2;
    walls.push(start + z * (1 + drift * z) + wallSd * random.normal());
  }
  return { walls: Float64Array.from(walls), start, end, firstSign: 1 };
}
const IDEAL = grating(0.001, 0.011);
const SECTION = { start: 0.001, length: 0.01 };
const WHOLE: Grating = { walls: new Float64Array(0), start: 0.001, end: 0.011, firstSign: 1 };

/** φ by its definition, domain by domain in closed form: |(1/L)∫ d e^{iΔβz − γz} dz|. */
function slowPhi({ walls, start, end, firstSign }: Grating, deltaBeta: number, decay: number): number {
  const at = (z: number) => {
    const size = Math.exp(-decay * z) / (deltaBeta ** 2 + decay ** 2);
    const [c, s] = [Math.cos(deltaBeta * z), Math.sin(deltaBeta * z)];
    // e^{(iΔβ−γ)z}/(iΔβ−γ)
    return [size * (-decay * c + deltaBeta * s), size * (-decay * s - deltaBeta * c)] as const;
  };
  let [re, im, sign] = [0, 0, firstSign as number];
  const edges = [start, ...walls, end];
  for (let k = 1; k < edges.length; k++) {
    const [a, b] = [at(edges[k - 1]!), at(edges[k]!)];
    re += sign * (b[0] - a[0]);
    im += sign * (b[1] - a[1]);
    sign = -sign;
  }
  return Math.hypot(re, im) / (end - start);
}

Deno.test("at low depletion both integrations give η·P·P of every process, loss included", () => {
  const jittered = grating(0.001, 0.011, 0.4e-6, 7);
  const deltaBeta = K + 150;
  const tiny = 1e-10; // W: depletion of some 1e-11
  const sumPrefactor = 60_000;
  const o = omegas(MIX);
  const sum = mixingWeight({ a: LOSSY.s, b: LOSSY.i, out: LOSSY.p }, 0.012);
  const difference = mixingWeight({ a: LOSSY.p, b: LOSSY.s, out: LOSSY.i }, 0.012);
  const alpha = { p: 9, s: 3, i: 3 };
  const harmonic = secondHarmonicWeight(alpha, 0.012);
  const cases = [
    {
      lit: guide(TWICE, sumPrefactor, { s: tiny / 2, i: tiny / 2 }, alpha),
      w: harmonic,
      made: "p",
      pp: 0.25,
    },
    { lit: guide(MIX, sumPrefactor, { s: tiny, i: tiny }, LOSSY), w: sum, made: "p", pp: 1 },
    {
      lit: guide(MIX, sumPrefactor, { p: tiny, s: tiny }, LOSSY),
      w: difference,
      made: "i",
      pp: (o.i / o.p) ** 2, // the difference frequency's prefactor over the sum frequency's
    },
  ] as const;
  for (const { lit, w, made, pp } of cases) {
    const phi = slowPhi(jittered, deltaBeta, w.decay);
    const expected = sumPrefactor * pp * (0.01 * phi * w.amplitude * tiny) ** 2;
    assertClose(integrateDomains(lit, jittered, deltaBeta)[made], expected, { rel: 1e-8 });
    const kernel = equivalentKernel(phi, w.decay, SECTION);
    assertClose(integrateUniform(lit, SECTION, kernel)[made], expected, { rel: 1e-8 });
  }
});

Deno.test("depleted second harmonic without loss is tanh², domain by domain and evenly", () => {
  for (const x of [0.1, 1, 4, 9]) {
    // η = ¼·prefactor·L²·kernel² and ηP = x with P = 0.2 W
    const lit = guide(TWICE, 4 * x / (0.01 ** 2 * 0.2), { s: 0.1, i: 0.1 });
    assertClose(integrateUniform(lit, SECTION, 1).p / 0.2, depletedSecondHarmonic(x), { rel: 1e-9 });
    // one domain in phase with the light, to the full strength of d
    assertClose(integrateDomains(lit, WHOLE, 0).p / 0.2, depletedSecondHarmonic(x), { rel: 1e-11 });
  }
});

Deno.test("undepleted mixing meets sin² and sinh² at any mismatch", () => {
  const o = omegas(MIX);
  for (const [x, halfPhase] of [[0.4, 0], [2.4, 0], [2.4, 1.1], [1, 3]] as const) {
    const delta = 2 * halfPhase / 0.01;
    const weak = 1e-13;
    const sum = guide(MIX, x / (0.01 ** 2 * 0.3), { s: 0.3, i: weak });
    const expected = undepletedSumFrequency(x / 0.3, 0.3, o.i / o.p, halfPhase);
    const photons = (out: number, omega: number, input: number) => out / omega / (weak / input);
    assertClose(photons(integrateDomains(sum, WHOLE, delta).p, o.p, o.i), expected, { rel: 1e-9 });

    const difference = guide(MIX, x / (0.01 ** 2 * 0.3), { p: 0.3, s: weak });
    const perW = x / 0.3 * (o.i / o.p) ** 2;
    const gain = undepletedDifferenceFrequency(perW, 0.3, o.s / o.i, halfPhase);
    assertClose(photons(integrateDomains(difference, WHOLE, delta).i, o.i, o.s), gain, { rel: 1e-9 });
    if (halfPhase === 0) {
      assertClose(photons(integrateUniform(sum, SECTION, 1).p, o.p, o.i), expected, { rel: 1e-9 });
      assertClose(photons(integrateUniform(difference, SECTION, 1).i, o.i, o.s), gain, { rel: 1e-9 });
    }
  }
});

Deno.test("a sum frequency that depletes both inputs follows the Jacobi sine", () => {
  // N_p = N_i sn²(√N_s·gL | k² = N_i/N_s), J. A. Armstrong et al., Phys. Rev. 127, 1918 (1962) (from memory)
  const o = omegas(MIX);
  const power = { s: 0.3, i: 0.2 };
  const [ns, ni] = [power.s / o.s, power.i / o.i];
  for (const x of [0.5, 2, 6]) {
    const lit = guide(MIX, x / (0.01 ** 2 * 0.3), power);
    const [many, few] = ns > ni ? [ns, ni] : [ni, ns];
    const sn = jacobiSine(Math.sqrt(many) * lit.coupling * 0.01, few / many);
    assertClose(integrateDomains(lit, WHOLE, 0).p / o.p, few * sn ** 2, { rel: 1e-10, abs: 1e-12 * few });
    assertClose(integrateUniform(lit, SECTION, 1).p / o.p, few * sn ** 2, { rel: 1e-8, abs: 1e-10 * few });
  }
});

/** sn(u | m) by descending Landen steps (arithmetic-geometric mean; NIST DLMF 22.20(ii)). */
function jacobiSine(u: number, m: number): number {
  const a = [1];
  const c = [Math.sqrt(m)];
  let b = Math.sqrt(1 - m);
  while (Math.abs(c[c.length - 1]!) > 1e-16 && a.length < 30) {
    const last = a[a.length - 1]!;
    c.push((last - b) / 2);
    a.push((last + b) / 2);
    b = Math.sqrt(last * b);
  }
  let angle = 2 ** (a.length - 1) * a[a.length - 1]! * u;
  for (let k = a.length - 1; k > 0; k--) angle = (angle + Math.asin(c[k]! / a[k]! * Math.sin(angle))) / 2;
  return Math.sin(angle);
}

Deno.test("Manley–Rowe sums are kept without loss, whatever the powers, walls and mismatch", () => {
  const watts = fc.double({ min: 0, max: 20, noNaN: true });
  fc.assert(
    fc.property(
      watts,
      watts,
      fc.boolean(),
      fc.double({ min: -2000, max: 2000, noNaN: true }),
      fc.integer({ min: 1, max: 1000 }),
      (a, b, sum, detuning, seed) => {
        const lit = guide(MIX, 2e5, sum ? { s: a, i: b } : { p: a, s: b });
        const o = omegas(MIX);
        const before = photons(lit.power, o);
        const total = before.p + before.s + before.i;
        const made = sum ? 1 : -1;
        const check = (out: WaveValues) => {
          const n = photons(out, o);
          assertClose(n.p + n.s, before.p + before.s, { abs: 1e-9 * total }, "pump + signal");
          assertClose(n.p + n.i, before.p + before.i, { abs: 1e-9 * total }, "pump + idler");
          // and energy follows, since ω_p = ω_s + ω_i
          const watt = (x: WaveValues) => x.p + x.s + x.i;
          assertClose(watt(out), watt(lit.power), { rel: 1e-9, abs: 1e-300 }, "power");
        };
        const real = { ...grating(0.001, 0.003, 0.5e-6, seed), firstSign: made as 1 | -1 };
        check(integrateDomains(lit, real, K + detuning));
        check(integrateUniform(lit, { start: 0.001, length: 0.002 }, FIRST_ORDER));
      },
    ),
    { numRuns: 25, seed: 11 },
  );
});

function photons(power: WaveValues, omega: WaveValues): WaveValues {
  return { p: power.p / omega.p, s: power.s / omega.s, i: power.i / omega.i };
}

Deno.test("integrateDomains() has settled: steps cut in three change nothing", () => {
  const lit = guide(MIX, 3e5, { s: 0.5, i: 0.4 }, LOSSY);
  const profile = { z: Float64Array.of(0.002, 0.0051, 0.009), delta: Float64Array.of(-200, 300, 0) };
  const real = grating(0.001, 0.011, 0.5e-6, 3);
  const once = integrateDomains(lit, real, K, { profile, scale: 1.001 });
  const fine = integrateDomains(lit, real, K, { profile, scale: 1.001, refine: 3 });
  for (const wave of ["p", "s", "i"] as const) assertClose(once[wave], fine[wave], { rel: 1e-11 });
});

Deno.test("the even integration stands in for random walls at any depletion", () => {
  for (const seed of [1, 2, 3]) {
    const real = grating(0.001, 0.011, 0.6e-6, seed);
    for (const x of [0.3, 1, 3]) {
      const lit = guide(TWICE, 4 * x / (0.01 ** 2 * 0.2 * FIRST_ORDER ** 2), { s: 0.1, i: 0.1 }, {
        p: 9,
        s: 3,
        i: 3,
      });
      const { decay } = secondHarmonicWeight(lit.alpha, 0.012);
      const kernel = equivalentKernel(slowPhi(real, K, decay), decay, SECTION);
      const exact = integrateDomains(lit, real, K).p;
      assertClose(integrateUniform(lit, SECTION, kernel).p, exact, { rel: 2e-3 }, `seed ${seed}, x ${x}`);
    }
  }
});

Deno.test("the even integration is no stand-in on a side lobe: there the two part company", () => {
  const lit = guide(TWICE, 4 * 9 / (0.01 ** 2 * 0.2 * FIRST_ORDER ** 2), { s: 0.1, i: 0.1 });
  const deltaBeta = K + 2 * 4.4934 / 0.01; // first side lobe of sinc²
  const kernel = slowPhi(IDEAL, deltaBeta, 0);
  const even = integrateUniform(lit, SECTION, kernel).p;
  const exact = integrateDomains(lit, IDEAL, deltaBeta).p;
  assertClose(exact / even < 0.8 || exact / even > 1.25 ? 1 : 0, 1, { abs: 0 }, `ratio ${exact / even}`);
});

Deno.test("a mismatch profile acts as the walls that it stands for", () => {
  // A constant δβ in the profile is a shift of Δβ; expansion by a factor is a stretched grating in a stretched guide.
  const lit = guide(TWICE, 5e5, { s: 0.1, i: 0.1 });
  const shifted = integrateDomains(lit, IDEAL, K - 250, {
    profile: { z: Float64Array.of(0.003), delta: Float64Array.of(250) },
  });
  assertClose(shifted.p, integrateDomains(lit, IDEAL, K).p, { rel: 1e-11 });
  const stretched: Grating = {
    walls: IDEAL.walls.map((z) => z * 1.01),
    start: IDEAL.start * 1.01,
    end: IDEAL.end * 1.01,
    firstSign: 1,
  };
  const longer = { ...lit, guideLength: lit.guideLength * 1.01 };
  assertClose(
    integrateDomains(lit, IDEAL, K, { scale: 1.01 }).p,
    integrateDomains(longer, stretched, K).p,
    { rel: 1e-10 },
  );
});

Deno.test("a linear drift of the mismatch costs what the Fresnel integral says", () => {
  // phase error phi·(2z/L)² about the middle: phi = π/2 leaves 0.8003048, phi = π 0.39474132 (check-values C2, recomputed)
  const lit = guide(TWICE, 1, { s: 1e-6, i: 1e-6 });
  const ideal = integrateDomains(lit, IDEAL, K).p;
  for (const [phi, share] of [[1.57079633, 0.8003048], [3.14159265, 0.39474132]] as const) {
    const edge = 4 * phi / 0.01; // dθ/dz at the ends, θ = phi·(2z/L)²
    const profile = { z: Float64Array.of(0.001, 0.011), delta: Float64Array.of(-edge, edge) };
    const drifted = integrateDomains(lit, IDEAL, K, { profile }).p;
    // a grating is made of domains: its sum differs from the integral by terms of δβ/K = 2e-3 at the ends
    assertClose(drifted / ideal, share, { rel: 1e-3 });
  }
});

Deno.test("peakConversion() counts photons of the weaker input", () => {
  const o = omegas(MIX);
  const x = 1.7;
  const even = (lit: LitGuide) => integrateUniform(lit, SECTION, 1);
  const lit = guide(MIX, x / (0.01 ** 2 * 0.3), { s: 0.3 });
  // no power stated for the idler: a probe, so the undepleted answer
  const probe = undepletedSumFrequency(x / 0.3, 0.3, o.i / o.p);
  assertClose(peakConversion("sum-frequency", lit, even), probe, { rel: 1e-9 });
  const both = guide(MIX, x / (0.01 ** 2 * 0.3), { s: 0.3, i: 0.1 });
  const converted = peakConversion("sum-frequency", both, even);
  assertClose(converted, even(both).p / o.p / (0.1 / o.i), { rel: 1e-12 });
  const twice = guide(TWICE, 4 * 2 / (0.01 ** 2 * 0.2), { s: 0.1, i: 0.1 });
  assertClose(peakConversion("second-harmonic", twice, even), Math.tanh(Math.sqrt(2)) ** 2, { rel: 1e-9 });
  const down = guide(MIX, x / (0.01 ** 2 * 0.3), { p: 0.3 });
  const gain = undepletedDifferenceFrequency(x / 0.3 * (o.i / o.p) ** 2, 0.3, o.s / o.i);
  assertClose(peakConversion("difference-frequency", down, even), gain, { rel: 1e-9 });
});

Deno.test("conversion refuses what has no answer", () => {
  const lit = guide(MIX, 1e4, { s: 0.3, i: 0.1 });
  const even = (l: LitGuide) => integrateUniform(l, SECTION, 1);
  throws(() => integrateUniform({ ...lit, power: { p: 1, s: 1, i: 1 } }, SECTION, 1), /all three waves/);
  throws(() => integrateUniform({ ...lit, power: { p: 0, s: NaN, i: 1 } }, SECTION, 1), RangeError);
  throws(() => integrateUniform(lit, { start: 0.005, length: 0.01 }, 1), /inside 0 to 0.012/);
  throws(() => integrateUniform(lit, SECTION, NaN), RangeError);
  throws(() => integrateDomains(lit, { ...WHOLE, end: 0.02 }, 0), /inside 0 to 0.012/);
  throws(() => integrateDomains(lit, WHOLE, Infinity), RangeError);
  throws(() => integrateDomains(lit, WHOLE, 0, { scale: 0 }), RangeError);
  throws(() => integrateDomains({ ...lit, guideLength: 0 }, WHOLE, 0), RangeError);
  throws(() => peakConversion("sum-frequency", { ...lit, power: NO_LOSS }, even), /no power/);
  throws(() => peakConversion("difference-frequency", lit, even), /wave that is made/);
  throws(
    () => peakConversion("second-harmonic", { ...lit, power: { p: 0, s: 1, i: 2 } }, even),
    /two equal halves/,
  );
});

Deno.test("loss alone acts where nothing couples", () => {
  const lit = guide(MIX, 0, { s: 0.3, i: 0.1 }, LOSSY);
  const out = integrateDomains(lit, IDEAL, K);
  assertClose(out.s, 0.3 * Math.exp(-3 * 0.012), { rel: 1e-12 });
  assertClose(out.i, 0.1 * Math.exp(-5 * 0.012), { rel: 1e-12 });
  assertClose(integrateUniform(lit, SECTION, 1).s, 0.3 * Math.exp(-3 * 0.012), { rel: 1e-10 });
  assertClose(lossyUniform(0, 3, 0.012), (1 - Math.exp(-0.036)) ** 2 / 0.036 ** 2, { rel: 1e-12 });
});
