// Pure: no I/O, no clock, no hidden randomness.
import { lambdaOf } from "../../shared/units.ts";
import type { JointAmplitude } from "./amplitude.ts";
import type { Axis } from "./axis.ts";
import { absent, given, type Outcome } from "./outcome.ts";

/** Integrals of |F|² over both arms, each with its filters' power transmissions. */
export interface PairSums {
  /** Everything integrated: the open windows. */
  readonly total: number;
  /** Inside both stated windows, before filters. */
  readonly stated: number;
  /** ∬|F|²T_s, ∬|F|²T_i, ∬|F|²T_sT_i. */
  readonly signal: number;
  readonly idler: number;
  readonly both: number;
  /** Spectra of both arms behind both filters, per rad/s. */
  readonly signalSpectrum: Float64Array;
  readonly idlerSpectrum: Float64Array;
}

/**
 * One pass over a joint amplitude.
 * @param countRow which rows count as `stated`: each pair once, where the arms share their wavelengths
 */
export function pairSums(
  f: JointAmplitude,
  signal: Axis,
  idler: Axis,
  countRow: (omega: number) => boolean,
): PairSums {
  const { rows, cols, re, im, from, to } = f;
  const rowStated = statedPoints(signal);
  const colStated = statedPoints(idler);
  const signalSpectrum = new Float64Array(rows);
  const idlerSpectrum = new Float64Array(cols);
  let total = 0, stated = 0, sumS = 0, sumI = 0, both = 0;
  for (let j = 0; j < rows; j++) {
    const ts = signal.power[j]!;
    let rowTotal = 0, rowInside = 0, rowIdler = 0;
    for (let l = from[j]!; l < to[j]!; l++) {
      const p = j * cols + l;
      const square = re[p]! * re[p]! + im[p]! * im[p]!;
      rowTotal += square;
      rowInside += square * colStated[l]!;
      rowIdler += square * idler.power[l]!;
      idlerSpectrum[l]! += ts * square;
    }
    total += rowTotal;
    if (rowStated[j] === 1 && countRow(signal.omega[j]!)) stated += rowInside;
    sumS += ts * rowTotal;
    sumI += rowIdler;
    both += ts * rowIdler;
    signalSpectrum[j] = ts * rowIdler / signal.weight[j]!;
  }
  for (let l = 0; l < cols; l++) idlerSpectrum[l]! *= idler.power[l]! / idler.weight[l]!;
  return { total, stated, signal: sumS, idler: sumI, both, signalSpectrum, idlerSpectrum };
}

function statedPoints(axis: Axis): Uint8Array {
  const out = new Uint8Array(axis.omega.length);
  for (const s of axis.segments) if (s.stated) out.fill(1, s.first, s.first + s.count);
  return out;
}

/**
 * FWHM in wavelength (m) of a spectrum per rad/s, between its outermost half-maximum crossings, interpolated. At the
 * edge of a filter the crossing is the edge; null if an unfiltered spectrum has not fallen to half where its window ends.
 */
export function bandwidth(axis: Axis, spectrum: Float64Array, filtered: boolean): Outcome {
  const x: number[] = [];
  const y: number[] = [];
  for (const { from, to, first, count } of axis.segments) {
    // straight lines carry the spectrum to the edges, where it may jump
    const at = (k: number) => spectrum[first + k]!;
    const next = Math.min(1, count - 1);
    x.push(from);
    y.push(Math.max(0, 1.5 * at(0) - 0.5 * at(next)));
    for (let k = 0; k < count; k++) {
      x.push(axis.omega[first + k]!);
      y.push(at(k));
    }
    x.push(to);
    y.push(Math.max(0, 1.5 * at(count - 1) - 0.5 * at(count - 1 - next)));
    if (next === 0) y[y.length - 1] = y[y.length - 3] = at(0);
  }
  const half = y.reduce((a, b) => Math.max(a, b), 0) / 2;
  if (!(half > 0)) return absent("no pair passes the filters");
  const n = x.length;
  let first = 0;
  while (y[first]! < half) first++;
  let last = n - 1;
  while (y[last]! < half) last--;
  if (!filtered && (first === 0 || last === n - 1)) return absent("not resolved within the window");
  const lo = first === 0 ? x[0]! : crossing(x, y, first - 1, first, half);
  const hi = last === n - 1 ? x[n - 1]! : crossing(x, y, last + 1, last, half);
  return given(lambdaOf(lo) - lambdaOf(hi), "bandwidth");
}

/** Where a line from a low to a high knot meets `level`; the knots may share their x. */
const crossing = (x: number[], y: number[], low: number, high: number, level: number): number =>
  x[low]! + (level - y[low]!) / (y[high]! - y[low]!) * (x[high]! - x[low]!);
