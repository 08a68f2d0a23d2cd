// Pure: no I/O, no clock, no hidden randomness.
import { bandCovering, interpolateSpectrumInto } from "../poling/mod.ts";
import type { Axis } from "./axis.ts";
import { type Filter, transmission } from "./filters.ts";
import type { PreparedSource } from "./source.ts";
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

/** φ, scaled to pairs per second, on an axis of signal frequencies. */
export function lineOn({ source, k, windowI, gain }: PreparedSource, axis: Axis): Line {
  const n = axis.omega.length;
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  const powerI = new Float64Array(n);
  if (n === 0) return { axis, re, im, powerI };
  const delta = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    const partner = source.omegaP - axis.omega[j]!;
    delta[j] = k.mismatch - k.signal.at(axis.omega[j]!) - k.idler.at(partner);
    powerI[j] = passes(windowI, source.filters?.idler, partner);
  }
  const band = bandCovering(
    delta.reduce((a, b) => Math.min(a, b)),
    delta.reduce((a, b) => Math.max(a, b)),
    source.length,
  );
  interpolateSpectrumInto(source.spectrum(band), delta, re, im);
  for (let j = 0; j < n; j++) {
    const size = Math.sqrt(source.pump.averagePower * gain * axis.weight[j]! / (2 * Math.PI));
    re[j]! *= size;
    im[j]! *= size;
  }
  return { axis, re, im, powerI };
}
