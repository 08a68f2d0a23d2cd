import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import {
  pulse,
  type PulseShape,
  pulseWidth,
  type PumpSpectrum,
  recordedPulse,
  spectralWidth,
  TIME_BANDWIDTH,
} from "../../../models/pairs/mod.ts";
import { lambdaOf, omegaOf } from "../../../shared/units.ts";
import { PUBLISHED } from "./matrices.ts";

const SHAPES: PulseShape[] = ["gaussian", "sech"];

Deno.test("time-bandwidth products and the 775 nm example are the published ones", () => {
  assertClose(TIME_BANDWIDTH.gaussian, PUBLISHED.time_bandwidth.gaussian, { abs: 1e-8 });
  assertClose(TIME_BANDWIDTH.sech, PUBLISHED.time_bandwidth.sech2, { abs: 1e-9 });
  // same file: "775 nm, 1 ps Gaussian: 0.884071 nm"; λ²/c·0.4412712/τ is 0.8840731
  assertClose(spectralWidth("gaussian", 1e-12, 775e-9), 0.884071e-9, { rel: 3e-6 });
});

Deno.test("pulseWidth() undoes spectralWidth()", () => {
  for (const shape of SHAPES) {
    for (const fwhm of [3e-14, 1e-12, 1e-10]) {
      assertClose(pulseWidth(shape, spectralWidth(shape, fwhm, 791e-9), 791e-9), fwhm, { rel: 1e-12 });
    }
  }
});

/** ∫|α|² dΩ/2π by the midpoint rule over the support. */
function energy(p: PumpSpectrum): number {
  const n = 20_000;
  const h = (p.hi - p.lo) / n;
  let sum = 0;
  for (let k = 0; k < n; k++) sum += p.envelope(p.lo + (k + 0.5) * h) ** 2;
  return sum * h / (2 * Math.PI);
}

/** Intensity FWHM of the pulse in time, by direct Fourier integration of α·e^{i·gdd·Ω²/2}. */
function duration(p: PumpSpectrum, guess: number): number {
  const n = 4000;
  const h = (p.hi - p.lo) / n;
  const intensity = (t: number) => {
    let re = 0;
    let im = 0;
    for (let k = 0; k < n; k++) {
      const x = p.lo + (k + 0.5) * h;
      const phase = p.gdd * x * x / 2 - x * t;
      re += p.envelope(x) * Math.cos(phase);
      im += p.envelope(x) * Math.sin(phase);
    }
    return re * re + im * im;
  };
  const half = intensity(0) / 2;
  let [lo, hi] = [0, 2 * guess];
  for (let k = 0; k < 40; k++) {
    const mid = (lo + hi) / 2;
    if (intensity(mid) > half) lo = mid;
    else hi = mid;
  }
  return lo + hi;
}

Deno.test("pulse() carries unit energy, and its FWHM in time and frequency are those asked for", () => {
  for (const shape of SHAPES) {
    const p = pulse(shape, 1e-12, 791e-9);
    assertClose(energy(p), 1, { rel: 1e-9 }, shape);
    assertClose(p.envelope(p.fwhm / 2) ** 2 / p.envelope(0) ** 2, 0.5, { rel: 1e-12 }, shape);
    assertClose(p.fwhm, 2 * Math.PI * TIME_BANDWIDTH[shape] / 1e-12, { rel: 1e-12 }, shape);
    assertClose(duration(p, 1e-12), 1e-12, { rel: 1e-6 }, shape);
    assertClose(p.envelope(p.hi) / p.envelope(0), 1e-9, { rel: 1e-6 }, shape);
    assertClose(p.envelope(p.lo), p.envelope(p.hi), { rel: 1e-12 }, shape);
  }
});

Deno.test("the sampled shapes are those of the specification", () => {
  const tau = 0.7e-12;
  const T0 = tau / 1.7627471740390859;
  const g = pulse("gaussian", tau, 1e-6);
  const s = pulse("sech", tau, 1e-6);
  for (const x of [0.3e12, 2e12, 5e12]) {
    assertClose(g.envelope(x) / g.envelope(0), Math.exp(-x * x * tau * tau / (8 * Math.LN2)), { rel: 1e-12 });
    assertClose(s.envelope(x) / s.envelope(0), 1 / Math.cosh(Math.PI * x * T0 / 2), { rel: 1e-12 });
  }
});

Deno.test("group-delay dispersion stretches a Gaussian by √(1+q²) at constant spectrum", () => {
  // q = gdd·s² with α = exp(−Ω²/2s²), so s² = 4 ln 2/τ² — pairs.json, pump_chirp: "pulse stretched by sqrt(1+q^2)"
  const tau = 1e-12;
  for (const q of [0.5, 2]) {
    const p = pulse("gaussian", tau, 791e-9, q * tau * tau / (4 * Math.LN2));
    assertClose(p.fwhm, pulse("gaussian", tau, 791e-9).fwhm, { rel: 1e-15 });
    assertClose(duration(p, 3e-12), tau * Math.sqrt(1 + q * q), { rel: 1e-6 }, `q = ${q}`);
  }
});

/** The spectrum that an instrument would record, intensity per wavelength: |α|²·ω²-Jacobian. */
function recorded(p: PumpSpectrum, points: number) {
  return Array.from({ length: points }, (_, k) => {
    const x = p.lo / 1.5 + (k / (points - 1)) * (p.hi - p.lo) / 1.5;
    const lambda = lambdaOf(p.carrier + x);
    return { lambda, intensity: 7 * p.envelope(x) ** 2 / lambda ** 2 };
  });
}

Deno.test("recordedPulse() of a Gaussian's spectrum is that Gaussian, whatever the order of its rows", () => {
  const p = pulse("gaussian", 1e-13, 791e-9, 1e-27);
  const rows = recorded(p, 2001);
  const q = recordedPulse(rows, 791e-9, 1e-27);
  assertClose(energy(q), 1, { rel: 1e-6 });
  assertClose(q.fwhm, p.fwhm, { rel: 1e-5 });
  for (const x of [0, 0.4, -0.7, 1.1]) {
    assertClose(q.envelope(x * p.fwhm), p.envelope(x * p.fwhm), { rel: 1e-4 }, `Ω = ${x} FWHM`);
  }
  assert.equal(q.gdd, 1e-27);
  const turned = recordedPulse(rows.toReversed(), 791e-9, 1e-27);
  assert.equal(turned.envelope(3e12), q.envelope(3e12));
  assert.equal(q.envelope(q.hi * 1.01), 0);
});

Deno.test("recordedPulse() follows a pump that is tuned away from where it was recorded", () => {
  const p = pulse("gaussian", 1e-12, 791e-9);
  const moved = recordedPulse(recorded(p, 801), 792e-9, 0, 791e-9);
  assertClose(moved.carrier, omegaOf(792e-9), { rel: 1e-15 });
  assertClose(moved.envelope(1e12), p.envelope(1e12), { rel: 2e-3 });
});

Deno.test("recordedPulse() takes the outermost half-maximum crossings of a double peak", () => {
  const at = (nm: number, intensity: number) => ({ lambda: nm * 1e-9, intensity });
  const q = recordedPulse([at(790, 0), at(791, 1), at(792, 0), at(793, 1), at(794, 0)], 792e-9);
  assertClose(q.fwhm, omegaOf(790.5e-9) - omegaOf(793.5e-9), { rel: 2e-3 });
});

Deno.test("pumps that cannot be are refused", () => {
  assert.throws(() => pulse("gaussian", 0, 1e-6), RangeError);
  assert.throws(() => pulse("sech", 1e-12, -1e-6), RangeError);
  assert.throws(() => pulse("sech", 1e-12, 1e-6, NaN), RangeError);
  const one = { lambda: 1e-6, intensity: 1 };
  assert.throws(() => recordedPulse([one], 1e-6), /1 points/);
  assert.throws(() => recordedPulse([one, one], 1e-6), /twice/);
  assert.throws(() => recordedPulse([one, { lambda: 2e-6, intensity: -1 }], 1e-6), /-1/);
  assert.throws(() => recordedPulse([one, { lambda: 2e-6, intensity: NaN }], 1e-6), /NaN/);
  const dark = [{ lambda: 1e-6, intensity: 0 }, { lambda: 2e-6, intensity: 0 }];
  assert.throws(() => recordedPulse(dark, 1e-6), /above 0/);
});
