import { ok, strictEqual, throws } from "node:assert/strict";
import {
  bandCovering,
  gratingSpectrum,
  gratingSpectrumDirect,
  interpolateSpectrum,
  interpolateSpectrumInto,
  realiseGrating,
  spectrumPower,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

const period = 20e-6;
const vector = 2 * Math.PI / period;
const length = 10e-3;
const profile = { z: Float64Array.of(1e-3, 6e-3, 12e-3), delta: Float64Array.of(-600, 500, 0) };

Deno.test("interpolateSpectrum() holds 1e-6 of the peak at steps of 2π/(8L), up to both ends of the band", () => {
  const gratings = [
    uniformGrating({ start: 1e-3, length, period }),
    realiseGrating({ start: 1e-3, length, period, dutySd: 0.1, missing: 0.2 }, randomFrom(8)),
    // All of the section at its two ends: the fastest phases that ψ can have.
    { walls: Float64Array.of(1e-3 + 10e-6, 11e-3 - 10e-6), start: 1e-3, end: 11e-3, firstSign: 1 as const },
  ];
  const random = randomFrom("points");
  for (const grating of gratings) {
    for (const options of [{}, { decay: 60 }, { profile }]) {
      const band = { first: vector - 3000, step: 2 * Math.PI / 8 / length, count: 80 };
      const s = gratingSpectrum(grating, band, options);
      let peak = 0;
      for (let k = 0; k < 80; k++) peak = Math.max(peak, Math.hypot(s.re[k]!, s.im[k]!));
      for (let n = 0; n < 60; n++) {
        const at = n < 10
          ? band.first + random.uniform() * 2 * band.step
          : n < 20
          ? band.first + (79 - random.uniform() * 2) * band.step
          : band.first + random.uniform() * 79 * band.step;
        const exact = gratingSpectrumDirect(grating, { first: at, step: 1, count: 1 }, options);
        const got = interpolateSpectrum(s, at);
        const error = Math.hypot(got.re - exact.re[0]!, got.im - exact.im[0]!) / peak;
        ok(error < 1e-6, `relative error ${error} at ${at}`);
        assertClose(spectrumPower(s, at), got.re ** 2 + got.im ** 2, { rel: 1e-12 });
      }
    }
  }
});

Deno.test("interpolateSpectrum() returns a sample exactly", () => {
  const s = gratingSpectrum(uniformGrating({ start: 0, length, period }), {
    first: 1024,
    step: 64,
    count: 40,
  });
  for (const k of [0, 1, 17, 38, 39]) strictEqual(interpolateSpectrum(s, 1024 + 64 * k).re, s.re[k]);
});

Deno.test("interpolateSpectrumInto() puts the phase of the centre back, also in place", () => {
  const grating = uniformGrating({ start: 2e-3, length, period });
  const s = gratingSpectrum(grating, bandCovering(vector - 900, vector + 900, length), { profile });
  const points = Float64Array.of(vector + 555, vector - 900, vector, vector + 900);
  const [re, im] = [new Float64Array(4), new Float64Array(4)];
  interpolateSpectrumInto(s, points, re, im);
  // The definition, with the phase counted from the input facet: a centre at 0 by moving the grating there.
  const moved = uniformGrating({ start: -length / 2, length, period });
  const shifted = { ...profile, z: profile.z.map((z) => z - 2e-3 - length / 2) };
  for (let k = 0; k < 4; k++) {
    const one = gratingSpectrumDirect(moved, { first: points[k]!, step: 1, count: 1 }, { profile: shifted });
    // Moving by c turns φ by Δβ·c and θ by ∫₀^c of the moved profile: −600 up to 1 mm, then rising to 500 at 6 mm, then
    // falling by 500/6 mm to c = 7 mm.
    const theta = -600 * 1e-3 + (-600 + 500) / 2 * 5e-3 + (500 + 500 * 5 / 6) / 2 * 1e-3;
    const phase = points[k]! * 7e-3 + theta;
    assertClose(re[k]!, one.re[0]! * Math.cos(phase) - one.im[0]! * Math.sin(phase), { abs: 1e-6 }, "re");
    assertClose(im[k]!, one.im[0]! * Math.cos(phase) + one.re[0]! * Math.sin(phase), { abs: 1e-6 }, "im");
  }
  const copy = points.slice();
  interpolateSpectrumInto(s, copy, copy, new Float64Array(4));
  for (let k = 0; k < 4; k++) strictEqual(copy[k], re[k]);
});

Deno.test("bandCovering() leaves room on both sides, so that the ends are as good as the middle", () => {
  const band = bandCovering(100, 5000, length);
  ok(band.first <= 100 - 4 * band.step);
  ok(band.first + (band.count - 1) * band.step >= 5000 + 4 * band.step);
  assertClose(band.step, 2 * Math.PI / 8 / length, { rel: 1e-12 });
  ok(bandCovering(7, 7, length).count >= 10);
});

Deno.test("nothing is extrapolated", () => {
  const s = gratingSpectrum(uniformGrating({ start: 0, length, period }), {
    first: vector,
    step: 50,
    count: 20,
  });
  for (const at of [vector - 1, vector + 951, NaN, -vector]) {
    throws(() => interpolateSpectrum(s, at), RangeError);
    throws(() => spectrumPower(s, at), RangeError);
    throws(
      () => interpolateSpectrumInto(s, Float64Array.of(at), new Float64Array(1), new Float64Array(1)),
      RangeError,
    );
  }
  throws(() => interpolateSpectrum({ ...s, re: s.re.slice(0, 9), im: s.im.slice(0, 9) }, vector), RangeError);
  throws(
    () => interpolateSpectrumInto(s, Float64Array.of(vector), new Float64Array(2), new Float64Array(1)),
    RangeError,
  );
  throws(() => bandCovering(2, 1, length), RangeError);
  throws(() => bandCovering(0, 1e12, length), RangeError);
});

Deno.test("many points are read from a finer table, to 1e-6 of the peak and as strictly", () => {
  const grating = realiseGrating({ start: 1e-3, length, period, dutySd: 0.1, missing: 0.1 }, randomFrom(3));
  const s = gratingSpectrum(grating, bandCovering(vector - 3000, vector + 3000, length));
  const [lo, hi] = [s.first, s.first + (s.re.length - 1) * s.step];
  const points = Float64Array.from(
    { length: 20 * s.re.length },
    (_, k) => lo + (hi - lo) * k / (20 * s.re.length - 1),
  );
  const re = new Float64Array(points.length);
  const im = new Float64Array(points.length);
  interpolateSpectrumInto(s, points, re, im);
  let peak = 0;
  for (let k = 0; k < s.re.length; k++) peak = Math.max(peak, Math.hypot(s.re[k]!, s.im[k]!));
  points.forEach((x, k) => {
    const { re: a, im: b } = interpolateSpectrum(s, x);
    const [c, sn] = [Math.cos(x * s.centre), Math.sin(x * s.centre)];
    const error = Math.hypot(re[k]! - (c * a - sn * b), im[k]! - (c * b + sn * a)) / peak;
    ok(error < 3e-8, `relative error ${error} at ${x}`);
  });
  points[7] = hi + s.step;
  throws(() => interpolateSpectrumInto(s, points, re, im), RangeError);
});
