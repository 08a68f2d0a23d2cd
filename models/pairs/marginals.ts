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
 * edge of a filter the crossing is the edge. Null if the spectrum has not fallen to half before an unfiltered window
 * ends it.
 * @param openEnds ends of unfiltered windows, this arm's and (mirrored at ω_p/2) its partner's, rad/s
 * @param margin how near to one of them a crossing is due to the window, rad/s: the pump's width
 */
export function bandwidth(
  axis: Axis,
  spectrum: Float64Array,
  openEnds: readonly number[],
  margin: number,
): Outcome {
  const x: number[] = [];
  const y: number[] = [];
  const highest = spectrum.reduce((a, b) => Math.max(a, b), 0);
  for (const run of runsOf(axis)) refineRun(axis.omega, spectrum, run, highest, x, y);
  const half = y.reduce((a, b) => Math.max(a, b), 0) / 2;
  if (!(half > 0)) return absent("no pair passes the filters");
  const n = x.length;
  let first = 0;
  while (y[first]! < half) first++;
  let last = n - 1;
  while (y[last]! < half) last--;
  const lo = first === 0 ? x[0]! : crossing(x, y, first - 1, first, half);
  const hi = last === n - 1 ? x[n - 1]! : crossing(x, y, last + 1, last, half);
  if (openEnds.some((end) => Math.abs(end - lo) <= margin || Math.abs(end - hi) <= margin)) {
    return absent("not resolved within the window");
  }
  return given(lambdaOf(lo) - lambdaOf(hi), "bandwidth");
}

/** Neighbouring segments over which the spectrum does not jump. */
interface Run {
  readonly from: number;
  to: number;
  readonly first: number;
  end: number;
}

function runsOf(axis: Axis): Run[] {
  const runs: Run[] = [];
  let before: boolean | null = null;
  for (const { from, to, first, count, stated } of axis.segments) {
    const run = runs.at(-1);
    if (run !== undefined && stated === before) {
      run.to = to;
      run.end = first + count;
    } else runs.push({ from, to, first, end: first + count });
    before = stated;
  }
  return runs;
}

/** Points between two grid points at which the cubic through the nearest four is evaluated. */
const FINER = 8;

/** Weights of the four points about an interval of an even grid, at q/8 of it. */
const EVEN = Array.from({ length: FINER }, (_, q) => {
  const t = q / FINER;
  return [
    -t * (t - 1) * (t - 2) / 6,
    (t + 1) * (t - 1) * (t - 2) / 2,
    -(t + 1) * t * (t - 2) / 2,
    (t + 1) * t * (t - 1) / 6,
  ] as const;
});

/**
 * Where all points about an interval are below this share of the highest grid point, no point of the cubic reaches half
 * of the maximum: the weights' absolute values sum up to at most 1.64 (outer intervals), and 1.64·0.3 < ½.
 */
const FAR_BELOW = 0.3;

/** Appends a run from edge to edge, the cubic through the nearest four points carried half a step to the edges. */
function refineRun(
  omega: Float64Array,
  spectrum: Float64Array,
  run: Run,
  highest: number,
  x: number[],
  y: number[],
): void {
  const { from, to, first, end } = run;
  const put = (at: number, value: number) => {
    x.push(at);
    y.push(Math.max(0, value));
  };
  const push = (at: number) => put(at, lagrange(omega, spectrum, first, end, at));
  push(from);
  for (let k = first; k < end; k++) {
    const next = k + 1 < end ? omega[k + 1]! : to;
    const width = next - omega[k]!;
    let about = 0;
    for (let n = Math.max(first, k - 3); n < Math.min(end, k + 4); n++) about = Math.max(about, spectrum[n]!);
    if (about < FAR_BELOW * highest) {
      put(omega[k]!, spectrum[k]!);
      continue;
    }
    const even = k > first && k + 2 < end && Math.abs(omega[k]! - omega[k - 1]! - width) < 1e-9 * width &&
      Math.abs(omega[k + 2]! - next - width) < 1e-9 * width;
    for (let q = 0; q < FINER; q++) {
      const at = omega[k]! + q / FINER * width;
      if (!even) push(at);
      else {
        const w = EVEN[q]!;
        put(
          at,
          w[0] * spectrum[k - 1]! + w[1] * spectrum[k]! + w[2] * spectrum[k + 1]! + w[3] * spectrum[k + 2]!,
        );
      }
    }
  }
  push(to);
}

/** Lagrange interpolation through the (up to) four points of first … end − 1 about `at`; steps may differ. */
function lagrange(x: Float64Array, y: Float64Array, first: number, end: number, at: number): number {
  let lo = first;
  let hi = end;
  while (hi - lo > 1) {
    const mid = (lo + hi) >> 1;
    if (x[mid]! <= at) lo = mid;
    else hi = mid;
  }
  const start = Math.max(first, Math.min(lo - 1, end - 4));
  const stop = Math.min(start + 4, end);
  let sum = 0;
  for (let k = start; k < stop; k++) {
    let w = y[k]!;
    for (let q = start; q < stop; q++) if (q !== k) w *= (at - x[q]!) / (x[k]! - x[q]!);
    sum += w;
  }
  return sum;
}

/** Where a line from a low to a high knot meets `level`; the knots may share their x. */
const crossing = (x: number[], y: number[], low: number, high: number, level: number): number =>
  x[low]! + (level - y[low]!) / (y[high]! - y[low]!) * (x[high]! - x[low]!);
