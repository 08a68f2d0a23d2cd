// Pure: no I/O, no clock, no hidden randomness.
import type { Band } from "./grating.ts";
import { bandCovering, spectrumPower } from "./interpolate.ts";
import { TEMPERATURE_TOLERANCE, temperatureIntervals, type Temperatures } from "./operation.ts";
import type { GratingSpectrum } from "./spectrum_setting.ts";
import { crossings, leastBetween, scan, turningPoints } from "./_search.ts";

/** A peak counts if its power is at least this share of the highest peak's: side lobes do not. */
const LEAST_SHARE = 0.5;

export interface SpectrumPeak {
  /** 1/m. */
  readonly deltaBeta: number;
  /** |φ|² there. */
  readonly power: number;
}

/**
 * A grid of u = Δβ·scale for `peakTemperatures`: the reachable range, and around the grating vector (with the sign of
 * the range) at least 2 % and twenty line widths 2π/L, so that the main peak is seen even when the oven does not reach it.
 * @param low, high reachable u, 1/m  @param period 25 °C, m  @param length of the section at 25 °C, m
 */
export function bandForPeak(low: number, high: number, period: number, length: number): Band {
  const vector = (low + high < 0 ? -1 : 1) * 2 * Math.PI / period;
  const margin = Math.max(0.02 * Math.abs(vector), 20 * 2 * Math.PI / length);
  return bandCovering(Math.min(low, vector - margin), Math.max(high, vector + margin), length);
}

/** The peaks of |φ|² with at least half the power of the highest one, highest first. */
export function mainPeaks(s: GratingSpectrum): SpectrumPeak[] {
  const power = s.re.map((re, k) => re * re + s.im[k]! ** 2);
  let top = 0;
  for (const p of power) top = Math.max(top, p);
  const peaks: SpectrumPeak[] = [];
  for (let k = 1; k + 1 < power.length; k++) {
    // A sample can lie below the peak between samples: 0.8 keeps every candidate, the share is checked on the peak.
    if (!(power[k]! >= power[k - 1]! && power[k]! > power[k + 1]! && power[k]! >= 0.8 * LEAST_SHARE * top)) {
      continue;
    }
    const at = s.first + k * s.step;
    const least = leastBetween((u) => -spectrumPower(s, u), at - s.step, at + s.step, 1e-7 * s.step);
    peaks.push({ deltaBeta: least.x, power: -least.value });
  }
  peaks.sort((a, b) => b.power - a.power);
  return peaks.filter((p) => p.power >= LEAST_SHARE * peaks[0]!.power);
}

/**
 * Temperatures of operation of a grating whose walls are known: where |φ|² has its maximum inside the oven's range, not
 * at an edge. With u(T) = Δβ(T)·scale(T) the power depends on u alone (exactly without decay and profile; with them to
 * the thermal expansion, 1e-3 of their effect), so one spectrum over u, made with scale 1, serves all temperatures.
 * A maximum over T is a peak of the spectrum that u(T) passes or touches, or a turning point of u(T) on the slope of a
 * peak; it counts if its power is at least half that of the spectrum's highest peak, reachable or not. So the side lobes
 * of a peak that lies beyond the oven are no answer. The highest maximum wins.
 * @param s over u, reaching over the peak and over all of u(lo…hi): see `bandForPeak`
 * @param scaledMismatch u(T), 1/m, sign as Δβ
 * @returns all T that reach the winner, ascending; `nearest` is the lowest of them, or where u comes closest to the peak
 * @throws RangeError for an empty range, a function that is not finite, a turning point beyond the spectrum
 */
export function peakTemperatures(
  s: GratingSpectrum,
  scaledMismatch: (temperatureC: number) => number,
  [lo, hi]: readonly [number, number],
): Temperatures {
  const samples = scan(scaledMismatch, lo, hi, temperatureIntervals(lo, hi), "the temperature of the peak");
  const peaks = mainPeaks(s);
  const highest = peaks[0];
  if (highest === undefined) {
    throw new RangeError(
      `Cannot find the temperature of the peak: no peak inside ${s.first} … ` +
        `${s.first + (s.re.length - 1) * s.step} 1/m, need a band that reaches over it`,
    );
  }
  const touch = 1e-6 * s.step;
  const interior = (t: number) => t > lo + TEMPERATURE_TOLERANCE && t < hi - TEMPERATURE_TOLERANCE;
  const maxima: { power: number; temperatures: number[] }[] = [];
  for (const peak of peaks) {
    const found = crossings(scaledMismatch, samples, peak.deltaBeta, TEMPERATURE_TOLERANCE, touch);
    const inside = found.roots.filter(interior);
    if (inside.length > 0) maxima.push({ power: peak.power, temperatures: inside });
  }
  for (const turn of turningPoints(scaledMismatch, samples, TEMPERATURE_TOLERANCE)) {
    const power = spectrumPower(s, turn.value);
    // u stays on one side of the turning point: a maximum over T if the power falls towards that side.
    const beside = spectrumPower(s, turn.value - turn.side * 1e-3 * s.step);
    if (power > beside && power >= LEAST_SHARE * highest.power) {
      maxima.push({ power, temperatures: [turn.x] });
    }
  }
  if (maxima.length === 0) {
    const { nearest } = crossings(scaledMismatch, samples, highest.deltaBeta, TEMPERATURE_TOLERANCE, touch);
    return { roots: [], nearest };
  }
  const best = Math.max(...maxima.map((m) => m.power));
  const all = maxima.filter((m) => m.power >= best * (1 - 1e-9)).flatMap((m) => m.temperatures)
    .sort((a, b) => a - b);
  // A peak that u(T) just touches is found as a crossing and as a turning point.
  const roots = all.filter((t, k) => k === 0 || t - all[k - 1]! > 1e-3);
  return { roots, nearest: roots[0]! };
}
