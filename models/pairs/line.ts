// Pure: no I/O, no clock, no hidden randomness.
import { bandCovering, interpolateSpectrumInto } from "../poling/mod.ts";
import type { Axis } from "./axis.ts";
import { type Filter, transmission } from "./filters.ts";
import type { PairSource, PreparedSource } from "./source.ts";
import type { ArmWindow, Band } from "./window.ts";

/** Amplitude of a continuous pump's pairs on the line ω_i = ω_p − ω_s. */
export interface Line {
  /** Signal axis of which each point stands for the pair (ω, ω_p − ω). */
  readonly axis: Axis;
  /** √(PΓ²L²·cell/2π)·φ */
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly powerI: Float64Array;
}

export const intersect = (a: Band, b: Band): Band => [Math.max(a[0], b[0]), Math.min(a[1], b[1])];

/** Transmission inside the stated window, 0 outside it. */
export function passes({ stated }: ArmWindow, filter: Filter | undefined, omega: number): number {
  if (omega < stated[0] || omega > stated[1]) return 0;
  return filter === undefined ? 1 : transmission(filter, omega);
}

/** An axis with the Δβ of its pairs: what gratings of one length have in common. */
export interface LaidLine {
  readonly axis: Axis;
  readonly delta: Float64Array;
  readonly powerI: Float64Array;
  /** Range of Δβ, 1/m. */
  readonly lowest: number;
  readonly highest: number;
}

export function layLine({ source, k, windowI }: PreparedSource, axis: Axis): LaidLine {
  const n = axis.omega.length;
  const delta = new Float64Array(n);
  const powerI = new Float64Array(n);
  let lowest = Infinity;
  let highest = -Infinity;
  for (let j = 0; j < n; j++) {
    const partner = source.omegaP - axis.omega[j]!;
    const d = k.mismatch - k.signal.at(axis.omega[j]!) - k.idler.at(partner);
    delta[j] = d;
    lowest = Math.min(lowest, d);
    highest = Math.max(highest, d);
    powerI[j] = passes(windowI, source.filters?.idler, partner);
  }
  return { axis, delta, powerI, lowest, highest };
}

/** φ, scaled to pairs per second, on an axis of signal frequencies. */
export function lineOn(
  { source, gain }: PreparedSource,
  { axis, delta, powerI, lowest, highest }: LaidLine,
  spectrumOn: PairSource["spectrum"],
): Line {
  const n = axis.omega.length;
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  if (n === 0) return { axis, re, im, powerI };
  interpolateSpectrumInto(spectrumOn(bandCovering(lowest, highest, source.length)), delta, re, im);
  for (let j = 0; j < n; j++) {
    const size = Math.sqrt(source.pump.averagePower * gain * axis.weight[j]! / (2 * Math.PI));
    re[j]! *= size;
    im[j]! *= size;
  }
  return { axis, re, im, powerI };
}
