// Pure: no I/O, no clock, no hidden randomness.
import { type JointAmplitude, newScratch, prepareGrid, type Scratch } from "./amplitude.ts";
import type { Axis } from "./axis.ts";
import type { DelayMaximum } from "./delay.ts";
import type { CorrelationTerms } from "./g2.ts";
import { gramMoments, type GramScratch, newGramScratch } from "./gram.ts";
import { exchangeOverlap } from "./interference.ts";
import { armAxes, bandOf, fillGrid, type Layout, layOut, POINTS, pulsesOf } from "./layout.ts";
import { bandwidth, type PairSums, pairSums } from "./marginals.ts";
import { absent, given } from "./outcome.ts";
import { ratio, refine } from "./schmidt.ts";
import { filterShares } from "./shares.ts";
import {
  type PairSource,
  type PairSpectrum,
  type PreparedSource,
  prepareSource,
  type SpectrumDraws,
} from "./source.ts";
import { NOT_SEPARABLE, openEnds } from "./window.ts";

/** Memory for one worker: hand the same one to every call and little is allocated anew. */
export interface PairScratch {
  readonly main: Scratch;
  readonly exchange: Scratch;
  readonly gram: GramScratch;
  /** For the grid that the next finer one is compared with: both are needed at a time. */
  readonly other: { readonly main: Scratch; readonly exchange: Scratch };
}
export const newPairScratch = (): PairScratch => ({
  main: newScratch(),
  exchange: newScratch(),
  gram: newGramScratch(),
  other: { main: newScratch(), exchange: newScratch() },
});

const LIMIT = 512;

/** Joint amplitude F on its grids, so scaled that Σ|F|² is the mean number of pairs per pulse. */
export interface GriddedAmplitude {
  readonly amplitude: JointAmplitude;
  readonly signal: Axis;
  readonly idler: Axis;
}

/**
 * F of a pulsed source on `points` per stated window. The result lives in the scratch.
 * @throws RangeError for a continuous pump, or a source that cannot be one
 */
export function jointAmplitude(
  prepared: PreparedSource,
  points: number,
  scratch: Scratch = newScratch(),
): GriddedAmplitude {
  const [signal, idler] = armAxes(prepared, points);
  return { amplitude: amplitudeOn(prepared, signal, idler, scratch, true), signal, idler };
}

/**
 * F on a signal axis of the caller's, dark where that axis blocks, with the arm's own idler axis.
 * @throws RangeError for a continuous pump
 */
export function amplitudeAgainst(prepared: PreparedSource, signal: Axis, points: number): GriddedAmplitude {
  const idler = armAxes(prepared, points)[1];
  return { amplitude: amplitudeOn(prepared, signal, idler, newScratch(), false), signal, idler };
}

function amplitudeOn(
  prepared: PreparedSource,
  signal: Axis,
  idler: Axis,
  scratch: Scratch,
  withBlocked: boolean,
): JointAmplitude {
  const { source, k } = prepared;
  const grid = prepareGrid(pulsesOf(source).spectrum, k, signal, idler, scratch, withBlocked);
  return fillGrid(prepared, grid, source.spectrum(bandOf(prepared, [grid])));
}

interface GridResult {
  readonly sums: PairSums;
  readonly purity: number | null;
  readonly correlation: CorrelationTerms | null;
  readonly exchange: DelayMaximum | null;
  readonly signal: Axis;
  readonly idler: Axis;
}

/** Everything of one grating on a layout. */
function computeOn(
  prepared: PreparedSource,
  layout: Layout,
  spectrumOn: PairSource["spectrum"],
  why: string | null,
  gram: GramScratch,
): GridResult {
  const { main, exchange } = layout;
  const { signal, idler } = main;
  const spectrum = spectrumOn(bandOf(prepared, exchange === null ? [main] : [main, exchange]));
  const amplitude = fillGrid(prepared, main, spectrum);
  const sums = pairSums(amplitude, signal, idler, layout.counted);
  if (why !== null || !(sums.both > 0)) {
    return { sums, purity: null, correlation: null, exchange: null, signal, idler };
  }
  const moments = gramMoments(amplitude, signal.power, idler.power, gram);
  return {
    sums,
    purity: ratio(moments.squareFiltered, moments.traceFiltered),
    correlation: { ...moments, heralds: sums.idler },
    exchange: layout.exchangeBy === "nothing shared"
      ? { value: 0, delay: 0 }
      : exchange === null
      ? exchangeOverlap(amplitude, signal.weight[0]!)
      : exchangeOverlap(
        fillGrid(prepared, exchange, spectrum),
        exchange.signal.weight[0]!,
        exchange.signal.power,
        exchange.idler.power,
        sums.both,
      ),
    signal,
    idler,
  };
}

/**
 * Everything that the spectrum decides for a pulsed source: pairs per pulse, purity, what g2 is made of, filter shares,
 * exchange overlap, bandwidths. The grid is refined until purity, pair number (relative),
 * filter shares and overlap change by less than 1e-3.
 * @throws RangeError for a source that cannot be one
 */
export function pulsedSpectrum(source: PairSource, scratch: PairScratch = newPairScratch()): PairSpectrum {
  return pulsedDraws(source, scratch).refined;
}

/** {@link pulsedSpectrum}, and the same source with other gratings on the grid before the last. See {@link SpectrumDraws}. */
export function pulsedDraws(source: PairSource, scratch: PairScratch = newPairScratch()): SpectrumDraws {
  const prepared = prepareSource(source);
  const { windowS, windowI, separable } = prepared;
  const { points = POINTS, limit = Math.max(LIMIT, points), compare = true } = source.grid ?? {};
  const why = separable ? windowS.cut ?? windowI.cut : NOT_SEPARABLE;
  // Two memories in turn: the grid that the last one was compared with stays.
  const memories = [scratch.other, scratch];
  const compute = (n: number) => {
    const memory = memories.reverse()[0]!;
    const layout = layOut(prepared, n, memory, why === null);
    return { points: n, layout, result: computeOn(prepared, layout, source.spectrum, why, scratch.gram) };
  };
  const fine = compare
    ? refine(compute, (a, b) => largestChange(a.result, b.result), points, limit)
    : { result: compute(points), coarse: null, points, change: NaN, converged: null };
  const pairs = (result: GridResult, grid: PairSpectrum["grid"]) =>
    spectrumOf(prepared, result, why ?? "no pair passes the filters", grid);
  const base = fine.coarse ?? fine.result;
  const unrefined = { points: base.points, change: NaN, converged: null };
  return {
    refined: pairs(fine.result.result, {
      points: fine.points,
      change: fine.change,
      converged: isCapped(fine.result.result) ? false : fine.converged,
    }),
    base: pairs(base.result, unrefined),
    draw: (spectrumOn) => pairs(computeOn(prepared, base.layout, spectrumOn, why, scratch.gram), unrefined),
  };
}

const isCapped = ({ signal, idler }: GridResult): boolean => signal.capped || idler.capped;

function spectrumOf(
  { source, windowS, windowI, separable }: PreparedSource,
  { sums, purity, correlation, exchange, signal, idler }: GridResult,
  reason: string,
  grid: PairSpectrum["grid"],
): PairSpectrum {
  const width = pulsesOf(source).spectrum.fwhm;
  return {
    made: sums.stated,
    madeOpen: sums.total,
    separable,
    shares: separable ? filterShares(sums) : null,
    purity: purity === null ? absent(reason) : given(purity, "purity"),
    correlation,
    exchange: exchange === null ? absent(reason) : given(exchange.value, "exchange overlap"),
    exchangeDelay: exchange === null ? null : exchange.delay,
    windowS,
    windowI,
    bandwidthS: bandwidth(signal, sums.signalSpectrum, openEnds(windowS, windowI, source.omegaP), width),
    bandwidthI: bandwidth(idler, sums.idlerSpectrum, openEnds(windowI, windowS, source.omegaP), width),
    grid,
  };
}

function largestChange(a: GridResult, b: GridResult): number {
  const changes = [
    b.sums.stated > 0 ? Math.abs(a.sums.stated / b.sums.stated - 1) : 0,
    ...(["signal", "idler"] as const).map((arm) =>
      b.sums[arm] > 0 && a.sums[arm] > 0 ? Math.abs(a.sums.both / a.sums[arm] - b.sums.both / b.sums[arm]) : 0
    ),
  ];
  if (a.purity !== null && b.purity !== null) changes.push(Math.abs(a.purity - b.purity));
  if (a.exchange !== null && b.exchange !== null) changes.push(Math.abs(a.exchange.value - b.exchange.value));
  return Math.max(...changes);
}
