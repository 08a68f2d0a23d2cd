// Pure: no I/O, no clock, no hidden randomness.
import { lambdaOf, toNm } from "../../shared/units.ts";
import { carContinuous, carPulsed, type PairDetection } from "./car.ts";
import { continuousDraws, continuousSpectrum } from "./continuous.ts";
import { lowGainRemark } from "./counts.ts";
import {
  NO_LIMIT,
  NO_RATE,
  NOT_CONTINUOUS,
  nothing,
  type PairFigure,
  type PairPart,
} from "./figure_names.ts";
import { g2Heralded, g2Unheralded, powerAtG2 } from "./g2.ts";
import {
  assembleBudget,
  type Budget,
  type PairLosses,
  type PairSurvival,
  pairSurvival,
  type Stretch,
} from "./heralding.ts";
import { absent, combine, given, type Outcome } from "./outcome.ts";
import { newPairScratch, type PairScratch, pulsedDraws, pulsedSpectrum } from "./pulsed.ts";
import { schmidtNumber } from "./schmidt.ts";
import type { PairPump, PairSource, PairSpectrum, SpectrumDraws } from "./source.ts";
import { type Band, NOT_SEPARABLE } from "./window.ts";

/** What one arm's photon meets behind the guide's inside; each 0…1, or null with the reason why it is not known. */
export interface ArmOptics {
  /** 1 − R of the output facet. */
  readonly facet: Outcome;
  /** Overlap with the fibre's mode. */
  readonly coupling: Outcome;
  /** Efficiency of the detector. */
  readonly detector: Outcome;
  /** Dark counts, 1/s. */
  readonly dark: number;
}

/** Losses and optics behind the generation of the pairs. SI. */
export interface PairChain {
  /** L_g at temperature, m. */
  readonly guideLength: number;
  /** Where pairs are made, at temperature; see `poledStretches`. */
  readonly poled: readonly Stretch[];
  readonly losses: PairLosses;
  readonly signal: ArmOptics;
  readonly idler: ArmOptics;
  /** Coincidence window, s. */
  readonly window: number;
  /** The request's upper limit on g2_heralded, if it has one. */
  readonly g2Limit?: number;
  /** Why there is no operating point: pair figures are null with it, the budget is still given. */
  readonly unmatched?: string;
}

export interface PairResult {
  readonly figures: Readonly<Record<PairFigure, Outcome>>;
  /** The delay τ (s) at which the exchange overlap is largest; null without overlap. */
  readonly exchangeDelay: number | null;
  /** Stated windows, m, [shorter, longer]: a purity without its window is not a number. */
  readonly windowS: Band;
  readonly windowI: Band;
  readonly grid: PairSpectrum["grid"];
  readonly remarks: readonly string[];
}

/**
 * All pair figures of one guide at one temperature: {@link pairSpectrum}, then {@link assembleFigures}.
 * @throws RangeError for numbers that no guide has
 */
export function pairFigures(source: PairSource, chain: PairChain, scratch?: PairScratch): PairResult {
  return assembleFigures(pairSpectrum(source, scratch), source.pump, chain);
}

/**
 * What the spectrum alone decides: the costly half, independent of signal and idler loss, facets and detectors.
 * @throws RangeError for numbers that no guide has
 */
export function pairSpectrum(source: PairSource, scratch: PairScratch = newPairScratch()): PairSpectrum {
  return source.pump.kind === "pulsed" ? pulsedSpectrum(source, scratch) : continuousSpectrum(source);
}

/**
 * {@link pairSpectrum} for a source of which several gratings are known: what they have in common is worked out once.
 * @param scratch belongs to these draws until the last of them
 * @throws RangeError for numbers that no guide has
 */
export function pairSpectrumDraws(
  source: PairSource,
  scratch: PairScratch = newPairScratch(),
): SpectrumDraws {
  return source.pump.kind === "pulsed" ? pulsedDraws(source, scratch) : continuousDraws(source);
}

/**
 * The cheap half: losses and optics upon a spectrum. One spectrum may serve many draws of the losses.
 * @throws RangeError for numbers that no guide has
 */
export function assembleFigures(spectrum: PairSpectrum, pump: PairPump, chain: PairChain): PairResult {
  const survival = pairSurvival(chain.losses, chain.guideLength, chain.poled);
  const signal = armBudget(spectrum, "signal", survival.signalGivenIdler, chain.signal);
  const idler = armBudget(spectrum, "idler", survival.idlerGivenSignal, chain.idler);
  const remarks: string[] = [];
  const pairs = chain.unmatched === undefined
    ? pairPart(spectrum, pump, chain, survival, remarks)
    : nothing(chain.unmatched, pump.kind === "pulsed");
  if (spectrum.grid.converged === false) {
    remarks.push(
      `not_converged: the last doubling to ${spectrum.grid.points} points changed a figure by ${
        spectrum.grid.change.toPrecision(2)
      }`,
    );
  }
  const windowS = inWavelength(spectrum.windowS.stated);
  const windowI = inWavelength(spectrum.windowI.stated);
  const figures: Record<PairFigure, Outcome> = {
    ...pairs,
    heralding_signal: signal.total,
    heralding_idler: idler.total,
    window_signal_nm: given(toNm(windowS[1] - windowS[0]), "window"),
    window_idler_nm: given(toNm(windowI[1] - windowI[0]), "window"),
    ...factorFigures(signal, idler),
  };
  return {
    figures,
    exchangeDelay: chain.unmatched === undefined ? spectrum.exchangeDelay : null,
    windowS,
    windowI,
    grid: spectrum.grid,
    remarks,
  };
}

const inWavelength = ([lower, upper]: Band): Band => [lambdaOf(upper), lambdaOf(lower)];

function armBudget(
  spectrum: PairSpectrum,
  arm: "signal" | "idler",
  survival: number,
  optics: ArmOptics,
): Budget {
  const { shares, separable } = spectrum;
  const filter = shares !== null
    ? (arm === "signal" ? shares.signalGivenIdler : shares.idlerGivenSignal)
    : absent(separable ? "no pair within the windows" : NOT_SEPARABLE);
  const { facet, coupling, detector } = optics;
  return assembleBudget({ survival: given(survival, "survival"), facet, coupling, filter, detector });
}

function factorFigures(signal: Budget, idler: Budget) {
  const s = signal.factors;
  const i = idler.factors;
  return {
    survival_signal: s.survival,
    survival_idler: i.survival,
    facet_signal: s.facet,
    facet_idler: i.facet,
    coupling_signal: s.coupling,
    coupling_idler: i.coupling,
    filter_signal: s.filter,
    filter_idler: i.filter,
    detector_signal: s.detector,
    detector_idler: i.detector,
  };
}

function pairPart(
  spectrum: PairSpectrum,
  pump: PairPump,
  chain: PairChain,
  survival: PairSurvival,
  remarks: string[],
): PairPart {
  const { made, purity, correlation } = spectrum;
  const pulsed = pump.kind === "pulsed";
  const eta = heraldEfficiency(survival.idler, chain.idler);
  const noCorrelation = purity.value === null ? purity : null;
  const g2 = noCorrelation ?? combine([eta], (x) => g2Heralded(correlation!, x));
  const nm = (x: Outcome) => combine([x], toNm);
  if (pulsed) {
    const remark = lowGainRemark(made);
    if (remark !== null) remarks.push(remark);
  }
  return {
    pairs_per_pulse: pulsed ? given(made, "pairs per pulse") : absent(NOT_CONTINUOUS),
    pair_rate_hz: pulsed ? absent(NO_RATE) : given(made, "pair rate"),
    purity,
    schmidt_number: combine([purity], schmidtNumber),
    g2_unheralded: noCorrelation ?? given(g2Unheralded(correlation!), "g2"),
    g2_heralded: g2,
    exchange_overlap: spectrum.exchange,
    car: carOf(spectrum, pulsed, chain, survival),
    pump_power_at_g2_mw: powerFigure(g2, pump.averagePower, made, chain.g2Limit, remarks),
    bandwidth_signal_nm: nm(spectrum.bandwidthS),
    bandwidth_idler_nm: nm(spectrum.bandwidthI),
  };
}

/** η of the herald: everything behind the pair but its filter, which g2 takes from the spectrum. */
const heraldEfficiency = (survival: number, { facet, coupling, detector }: ArmOptics): Outcome =>
  combine([facet, coupling, detector], (f, c, d) => survival * f * c * d);

function powerFigure(
  g2: Outcome,
  power: number,
  made: number,
  limit: number | undefined,
  remarks: string[],
): Outcome {
  if (g2.value === null) return g2;
  if (limit === undefined) return absent(NO_LIMIT);
  const milliwatts = powerAtG2(limit, g2.value, power) * 1e3;
  const there = lowGainRemark(made * limit / g2.value);
  if (there !== null) remarks.push(`pump_power_at_g2_mw is an extrapolation; ${there}`);
  return given(milliwatts, "pump power");
}

/** Singles and coincidences of pairs: losses of both arms are correlated through the place where a pair is made. */
function carOf(spectrum: PairSpectrum, pulsed: boolean, chain: PairChain, survival: PairSurvival): Outcome {
  const { shares, madeOpen, separable } = spectrum;
  if (shares === null) return absent(separable ? "no pair within the windows" : NOT_SEPARABLE);
  const { signal: s, idler: i } = chain;
  const parts = [s.facet, s.coupling, s.detector, i.facet, i.coupling, i.detector];
  const missing = parts.find((x) => x.value === null);
  if (missing !== undefined) return missing;
  const [fs, cs, ds, fi, ci, di] = parts.map((x) => x.value!) as [
    number,
    number,
    number,
    number,
    number,
    number,
  ];
  const seen: PairDetection = {
    signal: survival.signal * fs * cs * ds * shares.signal,
    idler: survival.idler * fi * ci * di * shares.idler,
    both: survival.joint * fs * cs * ds * fi * ci * di * shares.both,
  };
  const dark = { signal: s.dark, idler: i.dark, window: chain.window };
  const car = pulsed ? carPulsed(madeOpen, seen, dark) : carContinuous(madeOpen, seen, dark);
  return Number.isFinite(car)
    ? given(car)
    : absent("no accidentals: neither pairs nor dark counts are detected");
}
