// Pure: no I/O, no clock, no hidden randomness.
import { SPEED_OF_LIGHT } from "../../shared/constants.ts";
import { omegaOf } from "../../shared/units.ts";

/** Spectral amplitude α(Ω) = envelope·exp(+i·gdd·Ω²/2) of a pulse, Ω = ω − carrier, fields e^{−iωt}. */
export interface PumpSpectrum {
  /** Carrier, rad/s. */
  readonly carrier: number;
  /** Support in Ω, rad/s: beyond it the envelope is below {@link NEGLIGIBLE} of its peak. */
  readonly lo: number;
  readonly hi: number;
  /** FWHM of |α|², rad/s; chirp does not change it. */
  readonly fwhm: number;
  /** Group-delay dispersion, s²; > 0: red first. */
  readonly gdd: number;
  /** |α| at Ω (rad/s), so that ∫|α|² dΩ/2π = 1: times √(pulse energy in J) it is in √(J·s). */
  envelope(offset: number): number;
}

/** Amplitude relative to the peak below which a pump is taken as dark. */
export const NEGLIGIBLE = 1e-9;

/** Intensity FWHM of a sech² pulse over its T₀: 2·arcosh √2 = 1.7627… */
const SECH_WIDTH = 2 * Math.acosh(Math.SQRT2);

/** FWHM in time (intensity) × FWHM in frequency (Hz) of transform-limited pulses: 0.4412712, 0.3148330. */
export const TIME_BANDWIDTH = {
  gaussian: 2 * Math.LN2 / Math.PI,
  sech: (SECH_WIDTH / Math.PI) ** 2,
} as const;
export type PulseShape = keyof typeof TIME_BANDWIDTH;

/** Spectral FWHM in wavelength (m) of a transform-limited pulse of intensity FWHM `fwhm` (s) at `lambda` (m). */
export function spectralWidth(shape: PulseShape, fwhm: number, lambda: number): number {
  const width = 2 * Math.PI * TIME_BANDWIDTH[shape] / fwhm;
  // both edges exactly: Δω = 2πcΔλ/(λ² − Δλ²/4), solved for Δλ without cancellation
  const c = 2 * Math.PI * SPEED_OF_LIGHT;
  return 2 * width * lambda ** 2 / (c + Math.sqrt(c * c + (width * lambda) ** 2));
}

/** Intensity FWHM (s) of the transform-limited pulse with a spectral FWHM of `width` (m) at `lambda` (m). */
export function pulseWidth(shape: PulseShape, width: number, lambda: number): number {
  const omega = 2 * Math.PI * SPEED_OF_LIGHT * width / (lambda ** 2 - width ** 2 / 4);
  return 2 * Math.PI * TIME_BANDWIDTH[shape] / omega;
}

/**
 * A gaussian pulse, α ∝ exp(−Ω²τ²/(8 ln 2)), or a sech pulse, α ∝ sech(πΩT₀/2) with T₀ = τ/1.7627….
 * @param fwhm τ, s: intensity FWHM of the transform-limited pulse (dispersion stretches it at constant spectrum)
 * @param lambda carrier wavelength, m
 * @param gdd s²
 * @throws RangeError if τ or λ is not positive, or gdd not finite
 */
export function pulse(shape: PulseShape, fwhm: number, lambda: number, gdd = 0): PumpSpectrum {
  requireNumbers(fwhm, lambda, gdd);
  const carrier = omegaOf(lambda);
  const width = 2 * Math.PI * TIME_BANDWIDTH[shape] / fwhm;
  if (shape === "gaussian") {
    const rate = fwhm ** 2 / (8 * Math.LN2);
    const peak = Math.sqrt(2 * Math.PI) * (2 * rate / Math.PI) ** 0.25;
    const reach = Math.sqrt(-Math.log(NEGLIGIBLE) / rate);
    const envelope = (x: number) => peak * Math.exp(-rate * x * x);
    return { carrier, lo: -reach, hi: reach, fwhm: width, gdd, envelope };
  }
  const rate = Math.PI * fwhm / SECH_WIDTH / 2;
  // ∫sech²(rΩ)dΩ = 2/r
  const peak = Math.sqrt(Math.PI * rate);
  const reach = Math.acosh(1 / NEGLIGIBLE) / rate;
  const envelope = (x: number) => peak / Math.cosh(rate * x);
  return { carrier, lo: -reach, hi: reach, fwhm: width, gdd, envelope };
}

/** One reading of a pump spectrum: wavelength in m, intensity per wavelength on a free scale. */
export interface SpectrumPoint {
  readonly lambda: number;
  readonly intensity: number;
}

/**
 * A measured spectrum with flat phase, plus gdd. The intensity per wavelength becomes a density in ω by the factor
 * λ²/2πc, is joined by straight lines and is 0 beyond its ends; the amplitude is its square root.
 * @param points at least two different wavelengths, in any order; intensities >= 0 and not all 0
 * @param lambda carrier wavelength, m
 * @param gdd s², about the carrier
 * @param recordedAt carrier when the spectrum was recorded (m): it is shifted in ω from there to `lambda`
 * @throws RangeError otherwise
 */
export function recordedPulse(
  points: readonly SpectrumPoint[],
  lambda: number,
  gdd = 0,
  recordedAt = lambda,
): PumpSpectrum {
  requireNumbers(1, lambda, gdd);
  requireNumbers(1, recordedAt, 0);
  const { x, density } = densityInOmega(points, omegaOf(recordedAt));
  let area = 0;
  for (let k = 1; k < x.length; k++) area += (x[k]! - x[k - 1]!) * (density[k]! + density[k - 1]!) / 2;
  if (!(area > 0)) {
    throw new RangeError("Cannot take a pump spectrum: found no intensity above 0, need some");
  }
  const peak = density.reduce((a, b) => Math.max(a, b));
  return {
    carrier: omegaOf(lambda),
    lo: x[0]!,
    hi: x[x.length - 1]!,
    fwhm: halfWidthsOf(x, density, peak / 2),
    gdd,
    envelope: (offset) => Math.sqrt(linear(x, density, offset) * 2 * Math.PI / area),
  };
}

function densityInOmega(points: readonly SpectrumPoint[], carrier: number) {
  const sorted = [...points].sort((a, b) => b.lambda - a.lambda);
  if (sorted.length < 2) {
    throw new RangeError(`Cannot take a pump spectrum of ${sorted.length} points: need at least 2`);
  }
  sorted.forEach(({ lambda, intensity }, k) => {
    if (!(lambda > 0 && intensity >= 0 && Number.isFinite(lambda * intensity))) {
      throw new RangeError(
        `Cannot take a pump spectrum: found intensity ${intensity} at ${lambda} m, need both finite, λ > 0, >= 0`,
      );
    }
    if (k > 0 && lambda === sorted[k - 1]!.lambda) {
      throw new RangeError(`Cannot take a pump spectrum: found ${lambda} m twice, need one intensity each`);
    }
  });
  return {
    x: Float64Array.from(sorted, (p) => omegaOf(p.lambda) - carrier),
    density: Float64Array.from(sorted, (p) => p.intensity * p.lambda ** 2),
  };
}

/** Full width between the outermost crossings of `level`: the widest reading of a spectrum with several peaks. */
function halfWidthsOf(x: Float64Array, y: Float64Array, level: number): number {
  const n = x.length;
  const cross = (a: number, b: number) => x[a]! + (level - y[a]!) / (y[b]! - y[a]!) * (x[b]! - x[a]!);
  let first = 0;
  while (y[first]! < level) first++;
  let last = n - 1;
  while (y[last]! < level) last--;
  const lo = first === 0 ? x[0]! : cross(first - 1, first);
  const hi = last === n - 1 ? x[n - 1]! : cross(last, last + 1);
  return hi - lo;
}

function linear(x: Float64Array, y: Float64Array, at: number): number {
  let lo = 0;
  let hi = x.length - 1;
  if (!(at >= x[lo]! && at <= x[hi]!)) return 0;
  while (hi - lo > 1) {
    const mid = (lo + hi) >> 1;
    if (x[mid]! <= at) lo = mid;
    else hi = mid;
  }
  return y[lo]! + (at - x[lo]!) / (x[hi]! - x[lo]!) * (y[hi]! - y[lo]!);
}

function requireNumbers(fwhm: number, lambda: number, gdd: number): void {
  if (!(fwhm > 0 && lambda > 0 && Number.isFinite(fwhm) && Number.isFinite(lambda) && Number.isFinite(gdd))) {
    throw new RangeError(
      `Cannot shape a pump: found FWHM ${fwhm} s at ${lambda} m with gdd ${gdd} s², need finite numbers, the first two > 0`,
    );
  }
}
