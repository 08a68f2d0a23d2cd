// Pure: no I/O, no clock, no hidden randomness.
import { type GratingSpectrum, interpolateSpectrumInto } from "../poling/mod.ts";
import type { Axis } from "./axis.ts";
import type { Curve } from "./curve.ts";
import type { PumpSpectrum } from "./pump.ts";
import { lookUp, pumpTable } from "./pump_table.ts";

/** Wave numbers of the three waves against angular frequency, as curves that are cheap to evaluate. */
export interface WaveNumbers {
  /** k_p(ω_p0 + Ω) − k_p(ω_p0) against Ω, over the support of the pump. */
  readonly pump: Curve;
  /** k_s(ω) and k_i(ω) less their values at the arm's centre, against ω, over the open windows. */
  readonly signal: Curve;
  readonly idler: Curve;
  /** Δβ at the three centres, 1/m; no grating term. */
  readonly mismatch: number;
  /** dk/dω of the pump at its carrier, s/m. */
  readonly pumpDelay: number;
}

/** A complex matrix, row-major: element (j, l) is re[j·cols + l] + i·im[j·cols + l]. Rows: signal, columns: idler. */
export interface JointAmplitude {
  readonly rows: number;
  readonly cols: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
  /** Columns from[j] … to[j] − 1 of row j may differ from 0; the others are 0. */
  readonly from: Int32Array;
  readonly to: Int32Array;
}

/** Memory that is reused from one joint amplitude to the next: a result is good until the scratch is used again. */
export interface Scratch {
  re: Float64Array;
  im: Float64Array;
  /** Packed, a number for every cell that is not dark: Δβ and ψ. */
  delta: Float64Array;
  psiRe: Float64Array;
  psiIm: Float64Array;
  /** … and everything in F but ψ. */
  factorRe: Float64Array;
  factorIm: Float64Array;
}

export function newScratch(): Scratch {
  const none = new Float64Array(0);
  return { re: none, im: none, delta: none, psiRe: none, psiIm: none, factorRe: none, factorIm: none };
}

/** Grids and pump on which an amplitude is asked for, with the Δβ that it will look up. */
export interface PreparedGrid {
  readonly signal: Axis;
  readonly idler: Axis;
  readonly from: Int32Array;
  readonly to: Int32Array;
  readonly cells: number;
  /** Range of Δβ over the cells that are not dark, 1/m. */
  readonly lowest: number;
  readonly highest: number;
  readonly scratch: Scratch;
  /** What the factors in the scratch were computed for: gratings that share it differ in ψ only. Null: not yet. */
  factorsFor: { readonly pump: PumpSpectrum; readonly centre: number; readonly strength: number } | null;
}

/**
 * First half of a joint amplitude: which cells the pump lights, and their Δβ = k_p − k_s − k_i.
 * @param withBlocked false: leave dark what a filter or the end of a window blocks
 */
export function prepareGrid(
  pump: PumpSpectrum,
  k: WaveNumbers,
  signal: Axis,
  idler: Axis,
  scratch: Scratch,
  withBlocked = true,
): PreparedGrid {
  const rows = signal.omega.length;
  const cols = idler.omega.length;
  grow(scratch, rows * cols);
  const from = new Int32Array(rows);
  const to = new Int32Array(rows);
  const kIdler = Float64Array.from(idler.omega, (w) => k.idler.at(w));
  const { delta } = scratch;
  let cells = 0;
  let lowest = Infinity;
  let highest = -Infinity;
  const open = (axis: Axis, j: number) => withBlocked || axis.power[j]! > 0;
  let lowestCol = 0;
  let first = cols;
  while (lowestCol < cols && !open(idler, lowestCol)) lowestCol++;
  while (first > 0 && !open(idler, first - 1)) first--;
  let end = first;
  for (let j = 0; j < rows; j++) {
    if (!open(signal, j)) continue;
    const shift = signal.omega[j]! - pump.carrier;
    // both axes ascend, so the lit columns move down as the signal's frequency goes up
    while (first > lowestCol && idler.omega[first - 1]! + shift > pump.lo) first--;
    while (end > lowestCol && idler.omega[end - 1]! + shift >= pump.hi) end--;
    from[j] = Math.min(first, end);
    to[j] = end;
    const base = k.mismatch - k.signal.at(signal.omega[j]!);
    for (let l = from[j]!; l < end; l++, cells++) {
      const d = base - kIdler[l]! + k.pump.at(idler.omega[l]! + shift);
      delta[cells] = d;
      if (d < lowest) lowest = d;
      if (d > highest) highest = d;
    }
  }
  return { signal, idler, from, to, cells, lowest, highest, scratch, factorsFor: null };
}

/**
 * Second half: F(ω_s, ω_i) = α(ω_s + ω_i)·φ(Δβ), complex, times √(strength·w_sw_i)/2π, so that with
 * strength = Γ²L²·(pulse energy) the sum of |F|² is the mean number of pairs per pulse.
 * @param k as in {@link prepareGrid}
 * @throws RangeError if the spectrum does not cover the grid's Δβ
 */
export function fillAmplitude(
  grid: PreparedGrid,
  k: WaveNumbers,
  pump: PumpSpectrum,
  spectrum: GratingSpectrum,
  strength: number,
): JointAmplitude {
  const { signal, idler, from, to, cells, scratch } = grid;
  const rows = signal.omega.length;
  const cols = idler.omega.length;
  const { re, im, delta, psiRe, psiIm, factorRe, factorIm } = scratch;
  const { centre } = spectrum;
  const held = grid.factorsFor;
  if (held === null || held.pump !== pump || held.centre !== centre || held.strength !== strength) {
    factorsInto(grid, k, pump, centre, strength);
    grid.factorsFor = { pump, centre, strength };
  }
  interpolateSpectrumInto(
    { ...spectrum, centre: 0 },
    delta.subarray(0, cells),
    psiRe.subarray(0, cells),
    psiIm.subarray(0, cells),
  );
  let cell = 0;
  for (let j = 0; j < rows; j++) {
    const row = j * cols;
    const end = to[j]!;
    re.fill(0, row, row + from[j]!);
    im.fill(0, row, row + from[j]!);
    for (let l = from[j]!; l < end; l++, cell++) {
      re[row + l] = factorRe[cell]! * psiRe[cell]! - factorIm[cell]! * psiIm[cell]!;
      im[row + l] = factorRe[cell]! * psiIm[cell]! + factorIm[cell]! * psiRe[cell]!;
    }
    re.fill(0, row + end, row + cols);
    im.fill(0, row + end, row + cols);
  }
  const size = rows * cols;
  return { rows, cols, re: re.subarray(0, size), im: im.subarray(0, size), from, to };
}

/** α(ω_s + ω_i)·e^{iΔβ·centre}·√(strength·w_sw_i)/2π of every lit cell. */
function factorsInto(
  grid: PreparedGrid,
  k: WaveNumbers,
  pump: PumpSpectrum,
  z: number,
  strength: number,
): void {
  const { signal, idler, from, to, scratch } = grid;
  const { factorRe, factorIm } = scratch;
  const table = pumpTable(pump, k, z);
  const a = { re: 0, im: 0 };
  // e^{iΔβ·z} less what the pump table carries: e^{i(Δβ₀ + k′_pΩ − k_s − k_i)·z}, Ω = ω_s + ω_i − ω_p0
  const scale = Math.sqrt(strength) / (2 * Math.PI);
  const u = phases(signal, k.signal, k.pumpDelay, pump.carrier, k.mismatch, z, scale);
  const v = phases(idler, k.idler, k.pumpDelay, 0, 0, z, 1);
  let cell = 0;
  for (let j = 0; j < signal.omega.length; j++) {
    const shift = signal.omega[j]! - pump.carrier;
    const uRe = u.re[j]!;
    const uIm = u.im[j]!;
    for (let l = from[j]!; l < to[j]!; l++, cell++) {
      lookUp(table, idler.omega[l]! + shift, a);
      const wRe = uRe * v.re[l]! - uIm * v.im[l]!;
      const wIm = uRe * v.im[l]! + uIm * v.re[l]!;
      factorRe[cell] = a.re * wRe - a.im * wIm;
      factorIm[cell] = a.re * wIm + a.im * wRe;
    }
  }
}

function phases(
  axis: Axis,
  k: Curve,
  delay: number,
  carrier: number,
  offset: number,
  z: number,
  scale: number,
) {
  const n = axis.omega.length;
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    const w = axis.omega[j]!;
    const phase = (offset + delay * (w - carrier) - k.at(w)) * z;
    const size = scale * Math.sqrt(axis.weight[j]!);
    re[j] = size * Math.cos(phase);
    im[j] = size * Math.sin(phase);
  }
  return { re, im };
}

const ARRAYS = ["re", "im", "delta", "psiRe", "psiIm", "factorRe", "factorIm"] as const;

function grow(scratch: Scratch, size: number): void {
  if (scratch.re.length >= size) return;
  for (const key of ARRAYS) scratch[key] = new Float64Array(size);
}
