import { deepStrictEqual, ok, throws } from "node:assert/strict";
import fc from "fast-check";
import {
  type Band,
  type Grating,
  gratingSpectrum,
  gratingSpectrumDirect,
  realiseGrating,
  type SpectrumOptions,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

/** Largest |fast − direct| relative to the peak of the direct sum, or to `floor` if that is larger. */
function worst(grating: Grating, band: Band, options: SpectrumOptions, floor = 0): number {
  const fast = gratingSpectrum(grating, band, options);
  const slow = gratingSpectrumDirect(grating, band, options);
  let peak = floor;
  let error = 0;
  for (let k = 0; k < band.count; k++) {
    peak = Math.max(peak, Math.hypot(slow.re[k]!, slow.im[k]!));
    error = Math.max(error, Math.hypot(fast.re[k]! - slow.re[k]!, fast.im[k]! - slow.im[k]!));
  }
  return error / peak;
}

const period = 20e-6;
const vector = 2 * Math.PI / period;

/** Gratings as made: 20 to 400 periods of 20 µm with errors, off the facet. */
const gratings = fc.record({
  seed: fc.integer(),
  periods: fc.integer({ min: 20, max: 400 }),
  start: fc.double({ min: 0, max: 5e-3, noNaN: true }),
  duty: fc.double({ min: 0.2, max: 0.8, noNaN: true }),
  dutySd: fc.double({ min: 0, max: 0.1, noNaN: true }),
  missing: fc.double({ min: 0, max: 0.3, noNaN: true }),
}).map((g) => realiseGrating({ ...g, length: g.periods * period, period }, randomFrom(g.seed)));

const profiles = fc.array(
  fc.tuple(fc.double({ min: 1e-5, max: 4e-3, noNaN: true }), fc.double({ min: -800, max: 800, noNaN: true })),
  { minLength: 1, maxLength: 8 },
).map((knots) => {
  const z = new Float64Array(knots.length);
  let at = -1e-3;
  knots.forEach(([width], k) => z[k] = at += width);
  return { z, delta: Float64Array.from(knots, (k) => k[1]) };
});

const options: fc.Arbitrary<SpectrumOptions> = fc.record({
  decay: fc.double({ min: -40, max: 40, noNaN: true }),
  profile: profiles,
  scale: fc.double({ min: 0.998, max: 1.004, noNaN: true }),
}, { requiredKeys: [] });

/** A band of 1 to 90 points around ±K, coarser or finer than a line width. */
const bands = fc.record({
  sign: fc.constantFrom(1, -1),
  count: fc.integer({ min: 1, max: 90 }),
  step: fc.double({ min: 20, max: 900, noNaN: true }),
}).map(({ sign, count, step }) => ({ first: sign * vector - (count >> 1) * step, step, count }));

Deno.test("gratingSpectrum() meets the direct sum to 1e-6 of the peak, for any grating, decay, profile, scale and sign", () => {
  fc.assert(
    fc.property(gratings, bands, options, (grating, band, o) => {
      const error = worst(grating, band, o, 0.02);
      ok(error <= 1e-6, `relative error ${error}`);
    }),
    { numRuns: 120, seed: 7 },
  );
});

Deno.test("gratingSpectrum() meets the direct sum on a steep profile, where many orders are needed", () => {
  const grating = uniformGrating({ start: 1e-3, length: 10e-3, period });
  const profile = { z: Float64Array.of(2e-3, 3e-3, 9e-3), delta: Float64Array.of(-9e3, 2e4, -5e3) };
  const band = { first: vector - 25e3, step: 500, count: 100 };
  const error = worst(grating, band, { profile });
  ok(error <= 1e-6, `relative error ${error}`);
});

Deno.test("gratingSpectrum() meets the direct sum through Δβ = 0, where it falls back to integration", () => {
  const grating = realiseGrating({ start: 0, length: 4e-3, period, duty: 0.4, dutySd: 0.05 }, randomFrom(3));
  const profile = { z: Float64Array.of(0, 4e-3), delta: Float64Array.of(-300, 500) };
  for (const o of [{}, { decay: 30 }, { profile }]) {
    const error = worst(grating, { first: -5e3, step: 100, count: 101 }, o);
    ok(error <= 1e-6, `relative error ${error}`);
  }
});

Deno.test("gratingSpectrum() meets the direct sum for a long wall list at both ends of a wide band", () => {
  const grating = realiseGrating(
    { start: 1e-3, length: 50e-3, period: 9.26e-6, dutySd: 0.05 },
    randomFrom("long"),
  );
  ok(grating.walls.length > 10_700);
  const step = 2 * Math.PI / 8 / 50e-3;
  const band = { first: 2 * Math.PI / 9.26e-6 - 1024 * step, step, count: 2048 };
  const fast = gratingSpectrum(grating, band, { decay: 3 });
  for (const k of [0, 1, 700, 1023, 1024, 1025, 2046, 2047]) {
    const one = { first: band.first + k * step, step, count: 1 };
    const slow = gratingSpectrumDirect(grating, one, { decay: 3 });
    assertClose(fast.re[k]!, slow.re[0]!, { abs: 1e-8 }, `re at ${k}`);
    assertClose(fast.im[k]!, slow.im[0]!, { abs: 1e-8 }, `im at ${k}`);
  }
});

Deno.test("gratingSpectrumDirect() agrees with quadrature of the definition on a fine grid", () => {
  // An integral of its own: midpoint sums of d(z)·e^(iΔβz + iθ(z) − decay·z), with d, δβ and θ followed step by step.
  const grating = realiseGrating(
    { start: 2e-4, length: 6e-4, period, dutySd: 0.1, missing: 0.1 },
    randomFrom(5),
  );
  const profile = { z: Float64Array.of(1e-4, 5e-4, 7e-4), delta: Float64Array.of(2e3, -4e3, 1e3) };
  const deltaBeta = 0.98 * vector;
  const decay = 200;
  const scale = 1.01;
  const steps = 800_000;
  const h = 8e-4 * scale / steps;
  let theta = 0;
  let re = 0;
  let im = 0;
  let wall = 0;
  let sign = 1;
  for (let n = 0; n < steps; n++) {
    const z = (n + 0.5) * h;
    const y = z / scale;
    const t = Math.min(1, Math.max(0, (y - 1e-4) / 4e-4));
    const u = Math.min(1, Math.max(0, (y - 5e-4) / 2e-4));
    const delta = y < 5e-4 ? 2e3 - 6e3 * t : -4e3 + 5e3 * u;
    theta += delta * h / 2;
    while (wall < grating.walls.length && grating.walls[wall]! <= y) {
      wall++;
      sign = -sign;
    }
    if (y >= 2e-4) {
      re += sign * Math.exp(-decay * z) * Math.cos(deltaBeta * z + theta) * h;
      im += sign * Math.exp(-decay * z) * Math.sin(deltaBeta * z + theta) * h;
    }
    theta += delta * h / 2;
  }
  const length = 6e-4 * scale;
  const s = gratingSpectrumDirect(grating, { first: deltaBeta, step: 1, count: 1 }, {
    decay,
    profile,
    scale,
  });
  const [c, sn] = [Math.cos(deltaBeta * s.centre), Math.sin(deltaBeta * s.centre)];
  // A wall falls anywhere in a step of 1 nm: 60 walls × 0.5 nm / 0.6 mm.
  assertClose(c * s.re[0]! - sn * s.im[0]!, re / length, { abs: 5e-5 }, "re");
  assertClose(c * s.im[0]! + sn * s.re[0]!, im / length, { abs: 5e-5 }, "im");
});

Deno.test("an ideal grating peaks at 2/π at duty ½, at any thermal scale, if Δβ follows the period", () => {
  const grating = uniformGrating({ start: 1e-3, length: 500 * period, period });
  for (const scale of [1, 1.0012]) {
    for (const sign of [1, -1]) {
      const s = gratingSpectrum(grating, { first: sign * vector / scale, step: 1, count: 1 }, { scale });
      assertClose(Math.hypot(s.re[0]!, s.im[0]!), 2 / Math.PI, { rel: 1e-8 });
    }
  }
});

Deno.test("φ(−Δβ) is the conjugate of φ(Δβ) without a profile", () => {
  fc.assert(
    fc.property(gratings, fc.double({ min: 0.5, max: 1.5, noNaN: true }), (grating, at) => {
      const up = gratingSpectrum(grating, { first: at * vector, step: 1, count: 1 }, { decay: 9 });
      const down = gratingSpectrum(grating, { first: -at * vector, step: 1, count: 1 }, { decay: 9 });
      assertClose(down.re[0]!, up.re[0]!, { abs: 1e-9 });
      assertClose(down.im[0]!, -up.im[0]!, { abs: 1e-9 });
    }),
    { numRuns: 50, seed: 1 },
  );
});

Deno.test("|φ| is at most 1, and at most 2/π near first order of an ideal grating", () => {
  const ideal = uniformGrating({ start: 0, length: 300 * period, period });
  const near = gratingSpectrum(ideal, { first: vector * 0.9, step: vector / 500, count: 101 });
  for (let k = 0; k < 101; k++) ok(Math.hypot(near.re[k]!, near.im[k]!) <= 2 / Math.PI * (1 + 1e-4));
  fc.assert(
    fc.property(gratings, fc.double({ min: -2 * vector, max: 2 * vector, noNaN: true }), (grating, at) => {
      const s = gratingSpectrum(grating, { first: at, step: 1, count: 1 });
      ok(Math.hypot(s.re[0]!, s.im[0]!) <= 1 + 1e-9);
    }),
    { numRuns: 100, seed: 2 },
  );
});

Deno.test("a grating is the sum of two adjacent pieces", () => {
  fc.assert(
    fc.property(gratings, fc.double({ min: 0.05, max: 0.95, noNaN: true }), options, (grating, share, o) => {
      const cut = grating.start + share * (grating.end - grating.start);
      const before = grating.walls.filter((z) => z <= cut);
      const left: Grating = { ...grating, walls: before, end: cut };
      const right: Grating = {
        walls: grating.walls.filter((z) => z > cut),
        start: cut,
        end: grating.end,
        firstSign: before.length % 2 === 0 ? 1 : -1,
      };
      const band = { first: vector, step: 1, count: 1 };
      const poledLength = grating.end - grating.start;
      const [all, a, b] = [grating, left, right].map((g) => {
        const s = gratingSpectrum(g, band, { ...o, poledLength });
        const phase = vector * s.centre;
        return {
          re: s.re[0]! * Math.cos(phase) - s.im[0]! * Math.sin(phase),
          im: s.im[0]! * Math.cos(phase) + s.re[0]! * Math.sin(phase),
        };
      });
      assertClose(a!.re + b!.re, all!.re, { abs: 1e-7 });
      assertClose(a!.im + b!.im, all!.im, { abs: 1e-7 });
    }),
    { numRuns: 60, seed: 4 },
  );
});

Deno.test("a constant profile is a shift of Δβ and keeps the phase of the input facet", () => {
  const grating = uniformGrating({ start: 1e-3, length: 2e-3, period });
  const profile = { z: Float64Array.of(5e-3), delta: Float64Array.of(700) };
  const shifted = gratingSpectrum(grating, { first: vector - 700, step: 1, count: 1 }, { profile });
  const plain = gratingSpectrum(grating, { first: vector, step: 1, count: 1 });
  // θ = 700·z is counted from z = 0, so φ is the same number; ψ differs by the phase 700·centre.
  const phase = 700 * plain.centre;
  assertClose(shifted.re[0]!, plain.re[0]! * Math.cos(phase) - plain.im[0]! * Math.sin(phase), { abs: 1e-9 });
  assertClose(shifted.im[0]!, plain.im[0]! * Math.cos(phase) + plain.re[0]! * Math.sin(phase), { abs: 1e-9 });
});

Deno.test("a loss that grows along the guide agrees with the closed form of a lossy uniform grating", () => {
  // ∫ e^(−az) d(z) e^(iKz) dz over whole periods is (2/π)·(1 − e^(−aL))/a up to a/K.
  const length = 1000 * period;
  const grating = uniformGrating({ start: 0, length, period });
  for (const a of [-50, 20, 115]) {
    const s = gratingSpectrum(grating, { first: vector, step: 1, count: 1 }, { decay: a });
    assertClose(
      Math.hypot(s.re[0]!, s.im[0]!),
      2 / Math.PI * -Math.expm1(-a * length) / (a * length),
      { rel: 1e-3 },
    );
  }
});

Deno.test("results do not depend on what was transformed before", () => {
  const small = uniformGrating({ start: 0, length: 1e-3, period });
  const band = { first: vector, step: 100, count: 33 };
  const profile = { z: Float64Array.of(0, 1e-3), delta: Float64Array.of(0, 900) };
  const before = gratingSpectrum(small, band);
  gratingSpectrum(uniformGrating({ start: 0, length: 30e-3, period }), { ...band, count: 500 }, {
    profile,
    decay: 4,
  });
  deepStrictEqual(gratingSpectrum(small, band), before);
});

Deno.test("gratingSpectrum() refuses what it cannot transform", () => {
  const grating = uniformGrating({ start: 0, length: 1e-3, period });
  const band = { first: vector, step: 1, count: 4 };
  const bad: [Grating, Band, SpectrumOptions][] = [
    [{ ...grating, walls: Float64Array.of(2e-5, 1e-5) }, band, {}],
    [{ ...grating, walls: Float64Array.of(NaN) }, band, {}],
    [{ ...grating, walls: Float64Array.of(2e-3) }, band, {}],
    [{ ...grating, end: 0 }, band, {}],
    [grating, { ...band, step: 0 }, {}],
    [grating, { ...band, count: 0 }, {}],
    [grating, { ...band, first: NaN }, {}],
    [grating, band, { scale: 0 }],
    [grating, band, { decay: Infinity }],
    [grating, band, { poledLength: -1 }],
    [grating, band, { profile: { z: new Float64Array(0), delta: new Float64Array(0) } }],
    [grating, band, { profile: { z: Float64Array.of(1, 1), delta: Float64Array.of(0, 0) } }],
    [grating, band, { profile: { z: Float64Array.of(1), delta: Float64Array.of(NaN) } }],
  ];
  for (const [g, b, o] of bad) {
    throws(() => gratingSpectrum(g, b, o), RangeError);
    throws(() => gratingSpectrumDirect(g, b, o), RangeError);
  }
});
