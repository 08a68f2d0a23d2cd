// Pure: no I/O, no clock, no hidden randomness.
import type { Axis, Segment } from "./axis.ts";
import { layExchange } from "./line_exchange.ts";
import { NOT_CONTINUOUS } from "./figure_names.ts";
import { intersect, type LaidLine, layLine, type Line, lineOn, passes } from "./line.ts";
import { bandwidth } from "./marginals.ts";
import { absent, type Outcome } from "./outcome.ts";
import { refine } from "./schmidt.ts";
import { filterShares } from "./shares.ts";
import {
  type PairSource,
  type PairSpectrum,
  type PreparedSource,
  prepareSource,
  signalSide,
  type SpectrumDraws,
} from "./source.ts";
import { type Band, NOT_SEPARABLE, openEnds } from "./window.ts";

const POINTS = 512;
const LIMIT = 8192;

interface LineResult {
  readonly total: number;
  readonly stated: number;
  readonly signal: number;
  readonly idler: number;
  readonly both: number;
  readonly line: Line;
  readonly spectrum: Float64Array;
}

/**
 * Everything that the spectrum decides for a continuous pump, on the line ω_i = ω_p − ω_s: rate = PΓ²L²∫|φ|²dω_s/2π in
 * the stated windows, filter shares, bandwidths, exchange overlap. No purity is claimed.
 * @throws RangeError for a pulsed pump, or a source that cannot be one
 */
export const continuousSpectrum = (source: PairSource): PairSpectrum => continuousDraws(source).refined;

/** {@link continuousSpectrum}, and the same source with other gratings on the grid before the last. See {@link SpectrumDraws}. */
export function continuousDraws(source: PairSource): SpectrumDraws {
  if (source.pump.kind !== "continuous") throw new RangeError("Cannot take the line of a pulsed pump");
  const prepared = prepareSource(source);
  const { points = POINTS, limit = Math.max(LIMIT, points), compare = true } = source.grid ?? {};
  const compute = (n: number) => {
    const line = layLine(prepared, lineAxis(prepared, n));
    return { points: n, line, result: computeLine(prepared, line, source.spectrum) };
  };
  const change = (a: LineResult, b: LineResult) => b.stated > 0 ? Math.abs(a.stated / b.stated - 1) : 0;
  const fine = compare
    ? refine(compute, (a, b) => change(a.result, b.result), points, limit)
    : { result: compute(points), coarse: null, points, change: NaN, converged: null };
  const base = fine.coarse ?? fine.result;
  const unrefined = { points: base.points, change: NaN, converged: null };
  // On one grid for all: a grid of its own for the exchange is laid only once.
  const onBase = lineSpectrum(prepared, base.points);
  return {
    refined: lineSpectrum(prepared, fine.points)(fine.result.result, source.spectrum, {
      points: fine.points,
      change: fine.change,
      converged: fine.converged,
    }),
    base: onBase(base.result, source.spectrum, unrefined),
    draw: (spectrumOn) => onBase(computeLine(prepared, base.line, spectrumOn), spectrumOn, unrefined),
  };
}

/** Puts a line's numbers together, with the exchange overlap on `points`. */
function lineSpectrum(prepared: PreparedSource, points: number) {
  const { source, windowS, windowI, separable } = prepared;
  const why = separable ? windowS.cut ?? windowI.cut : NOT_SEPARABLE;
  const exchangeOn = why === null ? layExchange(prepared, points) : null;
  return (
    result: LineResult,
    spectrumOn: PairSource["spectrum"],
    grid: PairSpectrum["grid"],
  ): PairSpectrum => {
    const { axis } = result.line;
    const idlerSide = mirrored(axis, source.omegaP);
    const exchange = exchangeOn === null ? null : exchangeOn(spectrumOn);
    return {
      made: result.stated,
      madeOpen: result.total,
      separable,
      shares: separable ? filterShares(result) : null,
      purity: absent(NOT_CONTINUOUS),
      correlation: null,
      exchange: exchange === null ? absent(why!) : exchange.value,
      exchangeDelay: exchange === null ? null : exchange.delay,
      windowS,
      windowI,
      bandwidthS: lineWidth(axis, result.spectrum, openEnds(windowS, windowI, source.omegaP)),
      bandwidthI: lineWidth(
        idlerSide,
        result.spectrum.toReversed(),
        openEnds(windowI, windowS, source.omegaP),
      ),
      grid,
    };
  };
}

const lineWidth = (axis: Axis, spectrum: Float64Array, ends: readonly number[]): Outcome =>
  axis.omega.length === 0
    ? absent("the windows hold no pair that conserves energy")
    : bandwidth(axis, spectrum, ends, 1e-6 * (axis.segments.at(-1)!.to - axis.segments[0]!.from));

function computeLine(
  prepared: PreparedSource,
  laid: LaidLine,
  spectrumOn: PairSource["spectrum"],
): LineResult {
  const { separable } = prepared;
  const line = lineOn(prepared, laid, spectrumOn);
  const { axis, re, im, powerI } = line;
  const side = signalSide(prepared);
  const spectrum = new Float64Array(axis.omega.length);
  let total = 0, stated = 0, signal = 0, idler = 0, both = 0;
  for (const segment of axis.segments) {
    const middle = (segment.from + segment.to) / 2;
    const counts = segment.stated && (separable || (middle > side[0] && middle < side[1]));
    for (let j = segment.first; j < segment.first + segment.count; j++) {
      const square = re[j]! ** 2 + im[j]! ** 2;
      const passed = square * axis.power[j]! * powerI[j]!;
      total += square;
      if (counts) stated += square;
      signal += square * axis.power[j]!;
      idler += square * powerI[j]!;
      both += passed;
      spectrum[j] = passed / axis.weight[j]!;
    }
  }
  return { total, stated, signal, idler, both, line, spectrum };
}

/** Signal axis cut where either arm's windows end; `stated` where both arms are in theirs. */
function lineAxis(prepared: PreparedSource, points: number): Axis {
  const { source, windowS, windowI, separable } = prepared;
  const { omegaP, samePolarisation } = source;
  const mirror = ([a, b]: Band): Band => [omegaP - b, omegaP - a];
  const open = intersect(windowS.open, mirror(windowI.open));
  const stated = intersect(windowS.stated, mirror(windowI.stated));
  let [lo, hi] = open;
  if (samePolarisation && separable) {
    // each pair once: the signal on its own side of ω_p/2, unless its stated window reaches over
    const side = signalSide(prepared);
    lo = Math.max(lo, Math.min(side[0], windowS.stated[0]));
    hi = Math.min(hi, Math.max(side[1], windowS.stated[1]));
  }
  if (!(hi > lo)) return emptyAxis;
  const breaks = [
    ...windowS.stated,
    ...mirror(windowI.stated),
    lo,
    hi,
    ...(samePolarisation ? [omegaP / 2] : []),
  ];
  const edges = [...new Set(breaks)].filter((e) => e >= lo && e <= hi).sort((a, b) => a - b);
  const segments: Segment[] = [];
  let first = 0;
  for (let k = 1; k < edges.length; k++) {
    const from = edges[k - 1]!;
    const to = edges[k]!;
    const inside = stated[1] > stated[0] && from >= stated[0] && to <= stated[1];
    const width = inside ? stated[1] - stated[0] : hi - lo;
    const count = Math.max(1, Math.ceil(points * (to - from) / width - 1e-9));
    segments.push({ from, to, first, count, stated: inside });
    first += count;
  }
  const omega = new Float64Array(first);
  const weight = new Float64Array(first);
  const power = new Float64Array(first);
  for (const { from, to, first, count } of segments) {
    const step = (to - from) / count;
    for (let j = 0; j < count; j++) {
      omega[first + j] = from + (j + 0.5) * step;
      weight[first + j] = step;
      power[first + j] = passes(windowS, source.filters?.signal, omega[first + j]!);
    }
  }
  return { omega, weight, power, segments, capped: false };
}

const emptyAxis: Axis = {
  omega: new Float64Array(0),
  weight: new Float64Array(0),
  power: new Float64Array(0),
  segments: [],
  capped: false,
};

/** The same axis seen from the idler: ascending in ω_p − ω. */
function mirrored(axis: Axis, omegaP: number): Axis {
  const total = axis.omega.length;
  return {
    omega: axis.omega.toReversed().map((w) => omegaP - w),
    weight: axis.weight.toReversed(),
    power: axis.power.toReversed(),
    segments: axis.segments.toReversed().map(({ from, to, first, count, stated }) => ({
      from: omegaP - to,
      to: omegaP - from,
      first: total - first - count,
      count,
      stated,
    })),
    capped: axis.capped,
  };
}
