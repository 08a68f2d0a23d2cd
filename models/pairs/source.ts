// Pure: no I/O, no clock, no hidden randomness.
import { SPEED_OF_LIGHT } from "../../shared/constants.ts";
import type { Band as MismatchBand, GratingSpectrum } from "../poling/mod.ts";
import type { WaveNumbers } from "./amplitude.ts";
import { parametricStrength } from "./counts.ts";
import { slope, tabulate } from "./curve.ts";
import type { Filter } from "./filters.ts";
import type { Outcome } from "./outcome.ts";
import type { PumpSpectrum } from "./pump.ts";
import type { CorrelationTerms } from "./g2.ts";
import { armsSeparable, type ArmWindow, armWindow, type Band, unfilteredHalfWidth } from "./window.ts";

/** A train of pulses, or a continuous wave; power in the guide behind the input facet, W. */
export type PairPump =
  | {
    readonly kind: "pulsed";
    readonly spectrum: PumpSpectrum;
    readonly averagePower: number;
    /** Pulses per second. */
    readonly repetition: number;
  }
  | { readonly kind: "continuous"; readonly averagePower: number };

/** One guide at one temperature as a source of photon pairs: everything that shapes their spectrum and number. SI. */
export interface PairSource {
  /** Centres ω_p = ω_s + ω_i, rad/s. */
  readonly omegaP: number;
  readonly omegaS: number;
  readonly omegaI: number;
  /** Wave numbers n_eff·ω/c (1/m) of the three waves against ω, at temperature; called about 40 times each. */
  readonly kP: (omega: number) => number;
  readonly kS: (omega: number) => number;
  readonly kI: (omega: number) => number;
  /** Where kS and kI answer, rad/s; default: everywhere that is asked. */
  readonly limits?: { readonly signal?: Band; readonly idler?: Band };
  readonly samePolarisation: boolean;
  /** The crystal's coefficient at these wavelengths, m/V, without 2/π. */
  readonly d: number;
  /** m² */
  readonly effectiveArea: number;
  /** Poled length L at temperature, m: the one that φ is normalised with. */
  readonly length: number;
  /**
   * φ of the grating at temperature on a band of Δβ, with pump loss as decay α_p/2 and without signal and idler loss.
   * Called once or twice per grid; the bands asked for change little, so a spectrum wide enough may be kept.
   */
  readonly spectrum: (band: MismatchBand) => GratingSpectrum;
  readonly pump: PairPump;
  readonly filters?: { readonly signal?: Filter; readonly idler?: Filter };
  readonly grid?: GridOptions;
}

export interface GridOptions {
  /** Points across each arm's window to start with; even, default 128 (512 along the line of a continuous pump). */
  readonly points?: number;
  /** Doubling stops here; default 512 (8192), or `points` if that is more. Equal to `points`: one grid, compared with the half of it. */
  readonly limit?: number;
  /** False: a single grid without comparison, for draws whose nominal case has converged. Default true. */
  readonly compare?: boolean;
}

/** What the spectrum alone decides; no loss behind the generation is in it. */
export interface PairSpectrum {
  /** Mean pairs per pulse, or pairs per second of a continuous pump, in the stated windows, before filters. */
  readonly made: number;
  /** The same over the open windows, which the shares below refer to. */
  readonly madeOpen: number;
  readonly separable: boolean;
  /** Shares of pairs that pass the filters; null if the arms are not separable. */
  readonly shares: FilterShares | null;
  readonly purity: Outcome;
  /** What g2 is made of; absent for the same reason as purity. */
  readonly correlation: CorrelationTerms | null;
  /** Largest overlap with the exchanged pair, and the delay τ (s) where it is. */
  readonly exchange: Outcome;
  readonly exchangeDelay: number | null;
  /** Stated windows, rad/s, and what they leave out. */
  readonly windowS: ArmWindow;
  readonly windowI: ArmWindow;
  /** FWHM of both arms' spectra behind both filters, m. */
  readonly bandwidthS: Outcome;
  readonly bandwidthI: Outcome;
  /** Points of the last grid per arm, largest change in its last doubling (NaN: not compared), whether that is < 1e-3. */
  readonly grid: { readonly points: number; readonly change: number; readonly converged: boolean | null };
}

/**
 * One source with several gratings of the same length: windows, curves, grids and the pump's part of the amplitude are
 * common to all of them. Carry `refined` to another grating by the ratio of two coarse spectra, draw/base: what the coarse
 * grid errs by cancels to first order.
 */
export interface SpectrumDraws {
  /** The source itself, on a grid refined until it has converged. */
  readonly refined: PairSpectrum;
  /** The same on the coarser grid of the draws: the one before the last. */
  readonly base: PairSpectrum;
  /** The source with another grating (see {@link PairSource.spectrum}) on that grid. */
  draw(spectrum: PairSource["spectrum"]): PairSpectrum;
}

/** Of the pairs made: shares with the signal, the idler, both through the filters; and each arm given the other. */
export interface FilterShares {
  readonly signal: number;
  readonly idler: number;
  readonly both: number;
  readonly signalGivenIdler: Outcome;
  readonly idlerGivenSignal: Outcome;
}

/** A source with its windows, curves and strength worked out. */
export interface PreparedSource {
  readonly source: PairSource;
  readonly k: WaveNumbers;
  readonly windowS: ArmWindow;
  readonly windowI: ArmWindow;
  readonly separable: boolean;
  /** Γ²L², 1/W */
  readonly gain: number;
}

/** Checks a source and works out what does not depend on the grid. @throws RangeError for what cannot be a source */
export function prepareSource(source: PairSource): PreparedSource {
  const { omegaP, omegaS, omegaI, kP, kS, kI, length, limits, filters, pump } = source;
  checkSource(source);
  // ω/c·n is smooth on the scale of ω: a five-point rule with steps of 2e-4·ω is exact to 1e-11
  const h = (omega: number) => 2e-4 * omega;
  const pumpDelay = slope(kP, omegaP, h(omegaP));
  const delay = slope(kS, omegaS, h(omegaS)) - slope(kI, omegaI, h(omegaI));
  const half = unfilteredHalfWidth(length, delay, pump.kind === "pulsed" ? pump.spectrum.fwhm : 0);
  const arm = (centre: number, filter?: Filter, limit?: Band) =>
    armWindow(
      {
        centre,
        ...(filter === undefined ? {} : { filter }),
        ...(limit === undefined ? {} : { limits: limit }),
      },
      half,
    );
  const windowS = arm(omegaS, filters?.signal, limits?.signal);
  const windowI = arm(omegaI, filters?.idler, limits?.idler);
  const kP0 = kP(omegaP), kS0 = kS(omegaS), kI0 = kI(omegaI);
  const n = (k: number, omega: number) => k * SPEED_OF_LIGHT / omega;
  const strength = parametricStrength({
    omegaS,
    omegaI,
    nP: n(kP0, omegaP),
    nS: n(kS0, omegaS),
    nI: n(kI0, omegaI),
    d: source.d,
    effectiveArea: source.effectiveArea,
  });
  const [lo, hi] = pump.kind === "pulsed"
    ? [pump.spectrum.lo, pump.spectrum.hi]
    : [-1e-6 * omegaP, 1e-6 * omegaP];
  return {
    source,
    k: {
      pump: tabulate((x) => kP(omegaP + x) - kP0, lo, hi),
      signal: tabulate((w) => kS(w) - kS0, ...windowS.open),
      idler: tabulate((w) => kI(w) - kI0, ...windowI.open),
      mismatch: kP0 - kS0 - kI0,
      pumpDelay,
    },
    windowS,
    windowI,
    separable: armsSeparable(source.samePolarisation, windowS.stated, windowI.stated),
    gain: strength * length ** 2,
  };
}

function checkSource({ omegaP, omegaS, omegaI, length, pump }: PairSource): void {
  if (!(omegaS > 0 && omegaI > 0 && Math.abs(omegaS + omegaI - omegaP) <= 1e-9 * omegaP)) {
    throw new RangeError(
      `Cannot make pairs: found ω_s ${omegaS} and ω_i ${omegaI} for ω_p ${omegaP} rad/s, need ω_s + ω_i = ω_p`,
    );
  }
  if (!(length > 0 && length < Infinity)) {
    throw new RangeError(`Cannot make pairs: found poled length ${length} m, need a finite number > 0`);
  }
  if (!(pump.averagePower > 0 && pump.averagePower < Infinity)) {
    throw new RangeError(
      `Cannot make pairs: found pump power ${pump.averagePower} W, need a finite number > 0`,
    );
  }
  if (pump.kind !== "pulsed") return;
  if (!(pump.repetition > 0 && pump.repetition < Infinity)) {
    throw new RangeError(
      `Cannot make pairs: found ${pump.repetition} pulses per second, need a finite number > 0`,
    );
  }
  if (!(Math.abs(pump.spectrum.carrier - omegaP) <= 1e-9 * omegaP)) {
    throw new RangeError(
      `Cannot make pairs: found the pulse at ${pump.spectrum.carrier} rad/s, need ω_p ${omegaP}`,
    );
  }
}

/**
 * For arms of one polarisation: the side of ω_p/2 where the signal is looked for, so that each pair is counted once.
 * By the windows if they are apart, else by the centres; the upper one if both are the same.
 */
export function signalSide({ source, windowS, windowI, separable }: PreparedSource): Band {
  const { omegaP, omegaS, omegaI } = source;
  const above = separable ? windowS.stated[0] >= windowI.stated[1] : omegaS >= omegaI;
  return above ? [omegaP / 2, Infinity] : [0, omegaP / 2];
}
