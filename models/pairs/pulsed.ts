// Pure: no I/O, no clock, no hidden randomness.
import { bandCovering } from "../poling/mod.ts";
import { fillAmplitude, type JointAmplitude, newScratch, prepareGrid, type Scratch } from "./amplitude.ts";
import { armAxis, type Axis, commonAxis, MOST_POINTS } from "./axis.ts";
import type { DelayMaximum } from "./delay.ts";
import type { CorrelationTerms } from "./g2.ts";
import { gramMoments, type GramScratch, newGramScratch } from "./gram.ts";
import { exchangeOverlap } from "./interference.ts";
import { bandwidth, type PairSums, pairSums } from "./marginals.ts";
import { absent, given } from "./outcome.ts";
import { ratio, refine } from "./schmidt.ts";
import { type PairSpectrum, type PreparedSource, prepareSource, signalSide } from "./source.ts";
import type { PairSource } from "./source.ts";
import { filterShares } from "./shares.ts";
import { type ArmWindow, type Band, NOT_SEPARABLE, openEnds } from "./window.ts";

/** Memory for one worker: hand the same one to every call and nothing is allocated anew. */
export interface PairScratch {
  readonly main: Scratch;
  readonly exchange: Scratch;
  readonly gram: GramScratch;
}
export const newPairScratch = (): PairScratch => ({
  main: newScratch(),
  exchange: newScratch(),
  gram: newGramScratch(),
});

const POINTS = 128;
const LIMIT = 512;

/**
 * The pump's FWHM spans at least so many steps of each axis of the first grid. The midpoint rule errs by
 * 2·exp(−2π²(σ/step)²) for a Gaussian: below 1e-13 here, and still 6e-4 on the half as fine grid it is compared with.
 */
const STEPS_PER_PUMP = 3;

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

function armAxes(prepared: PreparedSource, points: number): [Axis, Axis] {
  const { source, windowS, windowI, separable } = prepared;
  const { pump, omegaP, filters } = source;
  if (pump.kind !== "pulsed") {
    throw new RangeError("Cannot lay a joint amplitude: found a continuous pump, need pulses");
  }
  // doubling the points must halve every step, or the comparison of two grids would say nothing
  const longestStep = pump.spectrum.fwhm / STEPS_PER_PUMP * ((source.grid?.points ?? POINTS) / points);
  const axis = (window: ArmWindow, side: Band, filter?: NonNullable<typeof filters>["signal"]) => {
    const options = { points, longestStep };
    if (!source.samePolarisation) return armAxis(window, filter, options);
    // one polarisation: a break at ω_p/2 where pairs are counted on one side of it, else keep to the arm's own side
    if (!separable) return armAxis(window, filter, { ...options, breaks: [omegaP / 2] });
    const within: Band = [Math.min(side[0], window.stated[0]), Math.max(side[1], window.stated[1])];
    return armAxis(window, filter, { ...options, within });
  };
  const own = signalSide(prepared);
  const other: Band = own[0] > 0 ? [0, omegaP / 2] : [omegaP / 2, Infinity];
  return [axis(windowS, own, filters?.signal), axis(windowI, other, filters?.idler)];
}

function amplitudeOn(
  { source, k, gain }: PreparedSource,
  signal: Axis,
  idler: Axis,
  scratch: Scratch,
  withBlocked: boolean,
): JointAmplitude {
  const pump = source.pump as Extract<PairSource["pump"], { kind: "pulsed" }>;
  const grid = prepareGrid(pump.spectrum, k, signal, idler, scratch, withBlocked);
  const [lo, hi] = grid.cells > 0 ? [grid.lowest, grid.highest] : [k.mismatch, k.mismatch];
  const spectrum = source.spectrum(bandCovering(lo, hi, source.length));
  return fillAmplitude(grid, k, pump.spectrum, spectrum, gain * pump.averagePower / pump.repetition);
}

interface GridResult {
  readonly sums: PairSums;
  readonly purity: number | null;
  readonly correlation: CorrelationTerms | null;
  readonly exchange: DelayMaximum | null;
  readonly signal: Axis;
  readonly idler: Axis;
}

function computeOn(
  prepared: PreparedSource,
  points: number,
  why: string | null,
  scratch: PairScratch,
): GridResult {
  const { separable } = prepared;
  const { amplitude, signal, idler } = jointAmplitude(prepared, points, scratch.main);
  const side = signalSide(prepared);
  const counted = (w: number) => separable || (w > side[0] && w < side[1]);
  const sums = pairSums(amplitude, signal, idler, counted);
  if (why !== null || !(sums.both > 0)) {
    return { sums, purity: null, correlation: null, exchange: null, signal, idler };
  }
  const moments = gramMoments(amplitude, signal.power, idler.power, scratch.gram);
  return {
    sums,
    purity: ratio(moments.squareFiltered, moments.traceFiltered),
    correlation: { ...moments, heralds: sums.idler },
    exchange: exchangeOn(prepared, signal, idler, amplitude, points, sums.both, scratch.exchange),
    signal,
    idler,
  };
}

/**
 * Exchange overlap: the product of C and its exchanged self lives where both arms reach, so one grid over what their
 * stated windows have in common serves both; the norm is that of all pairs behind the filters.
 */
function exchangeOn(
  prepared: PreparedSource,
  signal: Axis,
  idler: Axis,
  amplitude: JointAmplitude,
  points: number,
  norm: number,
  scratch: Scratch,
): DelayMaximum {
  const { source, windowS, windowI } = prepared;
  const [s, i] = [windowS.stated, windowI.stated];
  const band: Band = [Math.max(s[0], i[0]), Math.min(s[1], i[1])];
  if (!(band[1] > band[0])) return { value: 0, delay: 0 };
  const size = signal.omega.length;
  const same = !windowS.filtered && !windowI.filtered && idler.omega.length === size &&
    signal.omega.every((w, k) => Math.abs(w - idler.omega[k]!) < 1e-6 * signal.weight[0]!);
  if (same) return exchangeOverlap(amplitude, signal.weight[0]!);
  const step = Math.min(longestStated(signal), longestStated(idler), (band[1] - band[0]) / points);
  const count = Math.min(Math.ceil((band[1] - band[0]) / step - 1e-9), MOST_POINTS);
  const a = commonAxis(band, count, windowS, source.filters?.signal);
  const b = commonAxis(band, count, windowI, source.filters?.idler);
  const common = amplitudeOn(prepared, a, b, scratch, false);
  return exchangeOverlap(common, a.weight[0]!, a.power, b.power, norm);
}

const longestStated = (axis: Axis): number =>
  axis.segments.filter((x) => x.stated).reduce((most, x) => Math.max(most, (x.to - x.from) / x.count), 0);

/**
 * Everything that the spectrum decides for a pulsed source: pairs per pulse, purity, what g2 is made of, filter shares,
 * exchange overlap, bandwidths. The grid is refined until purity, pair number (relative),
 * filter shares and overlap change by less than 1e-3.
 * @throws RangeError for a source that cannot be one
 */
export function pulsedSpectrum(source: PairSource, scratch: PairScratch = newPairScratch()): PairSpectrum {
  const prepared = prepareSource(source);
  const { windowS, windowI, separable } = prepared;
  const { points = POINTS, limit = Math.max(LIMIT, points), compare = true } = source.grid ?? {};
  const why = separable ? windowS.cut ?? windowI.cut : NOT_SEPARABLE;
  const compute = (n: number) => computeOn(prepared, n, why, scratch);
  const refined = compare
    ? refine(compute, largestChange, points, limit)
    : { result: compute(points), points, change: NaN, converged: null };
  const { sums, purity, correlation, exchange, signal, idler } = refined.result;
  const width = source.pump.kind === "pulsed" ? source.pump.spectrum.fwhm : 0;
  const capped = signal.capped || idler.capped;
  const reason = why ?? "no pair passes the filters";
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
    grid: { points: refined.points, change: refined.change, converged: capped ? false : refined.converged },
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
