import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import {
  jointAmplitude,
  newScratch,
  type PairSource,
  prepareSource,
  pulse,
} from "../../../models/pairs/mod.ts";
import { tabulate } from "../../../models/pairs/curve.ts";
import { interpolateSpectrum } from "../../../models/poling/mod.ts";
import { ktpSource, linearSource, pulses } from "./cases.ts";

/** F at one pair of frequencies straight from its definition, with φ = e^{iΔβ·centre}ψ. */
function byDefinition(source: PairSource, omegaS: number, omegaI: number): [number, number] {
  const delta = source.kP(omegaS + omegaI) - source.kS(omegaS) - source.kI(omegaI);
  const step = 2 * Math.PI / (8 * source.length);
  const spectrum = source.spectrum({ first: delta - 8 * step, step, count: 17 });
  const psi = interpolateSpectrum(spectrum, delta);
  if (source.pump.kind !== "pulsed") throw new Error("pulses only");
  const pump = source.pump.spectrum;
  const x = omegaS + omegaI - pump.carrier;
  const phase = delta * spectrum.centre + pump.gdd * x * x / 2;
  const size = pump.envelope(x);
  return [
    size * (psi.re * Math.cos(phase) - psi.im * Math.sin(phase)),
    size * (psi.re * Math.sin(phase) + psi.im * Math.cos(phase)),
  ];
}

Deno.test("tabulate() is exact for polynomials to fifth order and for a wave number to rounding", () => {
  const p = (x: number) => 3 - x + 2 * x ** 3 - x ** 5;
  const c = tabulate(p, -1, 2, 7);
  for (const x of [-1, -0.99, 0, 0.37, 1.9, 2]) assertClose(c.at(x), p(x), { abs: 1e-12 });
  const source = ktpSource();
  const k = tabulate(source.kI, 0.95 * source.omegaI, 1.05 * source.omegaI);
  for (let q = 0; q <= 100; q++) {
    const w = source.omegaI * (0.95 + 0.001 * q);
    // 1e-5 1/m turns a phase by 1e-7 rad in a guide of 1 cm
    assertClose(k.at(w), source.kI(w), { abs: 1e-5 });
  }
  assert.throws(() => tabulate(p, 1, 1), RangeError);
  assert.throws(() => tabulate(() => NaN, 0, 1), RangeError);
  assert.throws(() => tabulate(p, 0, 1, 5), RangeError);
});

Deno.test("jointAmplitude() is α(ω_s+ω_i)·φ(Δβ), phase included, cell by cell", () => {
  // a chirped short pulse and a long crystal: pump dispersion, chirp and the phase of the centre all turn F
  const source = ktpSource({ length: 0.02, pump: pulses(pulse("gaussian", 3e-13, 791.09e-9, 8e-26), 3e-3) });
  const prepared = prepareSource(source);
  const { amplitude: f, signal, idler } = jointAmplitude(prepared, 64);
  const scale = Math.sqrt(prepared.gain * 3e-3 / 76e6 * signal.weight[0]! * idler.weight[0]!) / (2 * Math.PI);
  const peak = f.re.reduce((m, x, p) => Math.max(m, Math.hypot(x, f.im[p]!)), 0);
  let compared = 0;
  for (let j = 3; j < f.rows; j += 7) {
    for (let l = 2; l < f.cols; l += 5) {
      const [re, im] = byDefinition(source, signal.omega[j]!, idler.omega[l]!);
      assertClose(f.re[j * f.cols + l]!, scale * re, { abs: 2e-6 * peak }, `re at ${j}, ${l}`);
      assertClose(f.im[j * f.cols + l]!, scale * im, { abs: 2e-6 * peak }, `im at ${j}, ${l}`);
      if (Math.hypot(re, im) * scale > 1e-3 * peak) compared++;
    }
  }
  assert.ok(compared > 20, `only ${compared} bright cells compared`);
});

Deno.test("jointAmplitude() with unlike steps and a sech pulse also follows the definition", () => {
  const filter = { shape: "flat-top", fwhm: 6e-9, peak: 1, centre: 1582.18e-9 } as const;
  const source = ktpSource({ pump: pulses(pulse("sech", 8e-13, 791.09e-9)), filters: { signal: filter } });
  const prepared = prepareSource(source);
  const { amplitude: f, signal, idler } = jointAmplitude(prepared, 32);
  assert.ok(signal.segments.length === 3 && signal.segments[1]!.count === 32);
  const peak = f.re.reduce((m, x, p) => Math.max(m, Math.hypot(x, f.im[p]!)), 0);
  for (let j = 0; j < f.rows; j += 5) {
    for (let l = 1; l < f.cols; l += 6) {
      const cell = Math.sqrt(signal.weight[j]! * idler.weight[l]! * prepared.gain * 1e-4 / 76e6) /
        (2 * Math.PI);
      const [re, im] = byDefinition(source, signal.omega[j]!, idler.omega[l]!);
      assertClose(f.re[j * f.cols + l]!, cell * re, { abs: 2e-6 * peak });
      assertClose(f.im[j * f.cols + l]!, cell * im, { abs: 2e-6 * peak });
    }
  }
});

Deno.test("cells that the pump leaves below 1e-9 are exactly 0, and from/to enclose the others", () => {
  const source = ktpSource({ pump: pulses(pulse("gaussian", 4e-12, 791.09e-9)) });
  const { amplitude: f, signal, idler } = jointAmplitude(prepareSource(source), 128);
  const { lo, hi } = pulse("gaussian", 4e-12, 791.09e-9);
  let dark = 0;
  for (let j = 0; j < f.rows; j++) {
    for (let l = 0; l < f.cols; l++) {
      const x = signal.omega[j]! + idler.omega[l]! - source.omegaP;
      const lit = x > lo && x < hi;
      assert.equal(l >= f.from[j]! && l < f.to[j]!, lit, `${j}, ${l}`);
      if (!lit) {
        dark++;
        assert.equal(f.re[j * f.cols + l], 0);
        assert.equal(f.im[j * f.cols + l], 0);
      }
    }
  }
  assert.ok(dark > 1000);
});

Deno.test("a used scratch gives the same numbers as a new one", () => {
  const prepared = prepareSource(ktpSource());
  const scratch = newScratch();
  jointAmplitude(
    prepareSource(ktpSource({ lambdaP: 790e-9, pump: pulses(pulse("gaussian", 1e-12, 790e-9)) })),
    96,
    scratch,
  );
  const again = jointAmplitude(prepared, 64, scratch).amplitude;
  const fresh = jointAmplitude(prepared, 64).amplitude;
  assert.deepEqual(again.re, fresh.re);
  assert.deepEqual(again.im, fresh.im);
});

Deno.test("sources that break energy conservation, or whose pulse has another carrier, are refused", () => {
  const base = linearSource({ aS: 1e-10, aI: -1e-10, psi: () => [1, 0] });
  assert.throws(() => prepareSource({ ...base, omegaS: base.omegaS * 1.001 }), /ω_s \+ ω_i = ω_p/);
  assert.throws(() => prepareSource({ ...base, length: 0 }), /poled length 0/);
  assert.throws(() => prepareSource({ ...base, d: 0 }), /found d = 0/);
  assert.throws(() => prepareSource({ ...base, pump: pulses(pulse("gaussian", 1e-12, 792e-9)) }), /need ω_p/);
  assert.throws(
    () => prepareSource({ ...base, pump: pulses(pulse("gaussian", 1e-12, 791e-9), 0) }),
    /pump power 0/,
  );
  const wave = { kind: "continuous", averagePower: 1e-3 } as const;
  assert.throws(() => jointAmplitude(prepareSource({ ...base, pump: wave }), 16), /continuous/);
});
