// Pure: no I/O, no clock, no hidden randomness.
import { bandCovering, type GratingSpectrum } from "../poling/mod.ts";
import {
  fillAmplitude,
  type JointAmplitude,
  type PreparedGrid,
  prepareGrid,
  type Scratch,
} from "./amplitude.ts";
import { armAxis, type Axis, commonAxis, MOST_POINTS } from "./axis.ts";
import { type PairSource, type PreparedSource, signalSide } from "./source.ts";
import type { ArmWindow, Band } from "./window.ts";

/** Points per stated window of the first grid. */
export const POINTS = 128;

/**
 * The pump's FWHM spans at least so many steps of each axis of the first grid. The midpoint rule errs by
 * 2·exp(−2π²(σ/step)²) for a Gaussian: below 1e-13 here, and still 6e-4 on the half as fine grid it is compared with.
 */
const STEPS_PER_PUMP = 3;

export function armAxes(prepared: PreparedSource, points: number): [Axis, Axis] {
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

export const pulsesOf = (source: PairSource) =>
  source.pump as Extract<PairSource["pump"], { kind: "pulsed" }>;

/** Δβ of all lit cells of some grids. */
export function bandOf({ source, k }: PreparedSource, grids: readonly PreparedGrid[]) {
  const lit = grids.filter((grid) => grid.cells > 0);
  if (lit.length === 0) return bandCovering(k.mismatch, k.mismatch, source.length);
  const lo = Math.min(...lit.map((grid) => grid.lowest));
  const hi = Math.max(...lit.map((grid) => grid.highest));
  return bandCovering(lo, hi, source.length);
}

export function fillGrid(
  { source, k, gain }: PreparedSource,
  grid: PreparedGrid,
  spectrum: GratingSpectrum,
): JointAmplitude {
  const { averagePower, repetition, spectrum: pulse } = pulsesOf(source);
  return fillAmplitude(grid, k, pulse, spectrum, gain * averagePower / repetition);
}

/** A source laid out on grids of so many points: all that gratings of one length have in common. */
export interface Layout {
  readonly main: PreparedGrid;
  /** Null: no exchange is asked for, or the main grid serves it, or the arms share no wavelength. */
  readonly exchange: PreparedGrid | null;
  readonly exchangeBy: "own grid" | "main grid" | "nothing shared";
  /** Counts a row as stated. */
  readonly counted: (omega: number) => boolean;
}

export function layOut(
  prepared: PreparedSource,
  points: number,
  scratch: { readonly main: Scratch; readonly exchange: Scratch },
  withExchange: boolean,
): Layout {
  const { source, k, separable } = prepared;
  const pulse = pulsesOf(source).spectrum;
  const [signal, idler] = armAxes(prepared, points);
  const main = prepareGrid(pulse, k, signal, idler, scratch.main, true);
  const side = signalSide(prepared);
  const counted = (w: number) => separable || (w > side[0] && w < side[1]);
  const common = withExchange ? exchangeAxes(prepared, signal, idler, points) : "nothing shared";
  if (typeof common === "string") return { main, exchange: null, exchangeBy: common, counted };
  const exchange = prepareGrid(pulse, k, ...common, scratch.exchange, false);
  return { main, exchange, exchangeBy: "own grid", counted };
}

/**
 * Exchange overlap: the product of C and its exchanged self lives where both arms reach, so one grid over what their
 * stated windows have in common serves both; the norm is that of all pairs behind the filters.
 */
function exchangeAxes(
  { source, windowS, windowI }: PreparedSource,
  signal: Axis,
  idler: Axis,
  points: number,
): [Axis, Axis] | "main grid" | "nothing shared" {
  const [s, i] = [windowS.stated, windowI.stated];
  const band: Band = [Math.max(s[0], i[0]), Math.min(s[1], i[1])];
  if (!(band[1] > band[0])) return "nothing shared";
  const size = signal.omega.length;
  const same = !windowS.filtered && !windowI.filtered && idler.omega.length === size &&
    signal.omega.every((w, k) => Math.abs(w - idler.omega[k]!) < 1e-6 * signal.weight[0]!);
  if (same) return "main grid";
  const step = Math.min(longestStated(signal), longestStated(idler), (band[1] - band[0]) / points);
  const count = Math.min(Math.ceil((band[1] - band[0]) / step - 1e-9), MOST_POINTS);
  return [
    commonAxis(band, count, windowS, source.filters?.signal),
    commonAxis(band, count, windowI, source.filters?.idler),
  ];
}

const longestStated = (axis: Axis): number =>
  axis.segments.filter((x) => x.stated).reduce((most, x) => Math.max(most, (x.to - x.from) / x.count), 0);
