// Pure: no I/O, no clock, no hidden randomness.
import type { GeometryParameter } from "../guides/mod.ts";
import type { Basis, GuideGeometry, ThreeWaves, Uncertain } from "../../shared/vocabulary.ts";

/** A trait as a guide's prediction uses it. */
export interface UsedTrait extends Uncertain {
  readonly basis: Basis;
  /** Traits with one key share their draws: one reading that feeds two figures must not count as two. */
  readonly key: string;
}

/** What is known of one facet for one arm. */
export type FacetTrait =
  /** No coating: Fresnel reflection of the effective index. */
  | { readonly state: "bare"; readonly basis: Basis }
  /** Coated: reflectivity at the arm's wavelength. */
  | { readonly state: "coated"; readonly reflectivity: UsedTrait };

/** One arm's traits at its wavelength and polarisation. Loss in dB/cm, mode-field diameters in µm at that wavelength. */
export interface ArmTraits {
  readonly loss: UsedTrait;
  /** Null: no mode size is known, with the reason. */
  readonly mode: {
    readonly x: UsedTrait;
    readonly y: UsedTrait;
    /** A size was read somewhere: if on no guide of this lot, then of another one. */
    readonly read?: boolean;
  } | { readonly reason: string };
  readonly facet: FacetTrait;
}

/** A poling window: what was seen between two positions (m from the input facet, 25 °C). */
export interface PolingWindow {
  readonly from: number;
  readonly length: number;
  readonly domains: number;
  readonly dutyMean: number;
  readonly dutySd: number;
  readonly merged: number;
}

/** What is known of a guide's grating, strongest first. */
export type PolingTraits =
  /** The complete list of domain walls, m from the input facet, ascending. */
  | { readonly from: "walls"; readonly walls: Float64Array; readonly basis: Basis }
  /** Inspected windows of this guide (measured) or of its die. */
  | {
    readonly from: "windows";
    readonly windows: readonly PolingWindow[];
    readonly basis: Basis;
    /** Windows of a whole die or wafer: the duty cycle as pooled for this guide, by whose u it may differ from them. */
    readonly duty?: UsedTrait;
  }
  /** Pooled or default duty cycle, its spread, and the share of inverted domains that are missing. */
  | {
    readonly from: "duty";
    readonly duty: UsedTrait;
    readonly dutySd: UsedTrait;
    readonly merged: UsedTrait;
  };

/** How a parameter of the cross-section varies along the guide: deviation from its mean, in its own unit, at z (m). */
export interface AlongGuide {
  readonly parameter: GeometryParameter;
  /** Ascending, from the input facet, at 25 °C. */
  readonly z: readonly number[];
  readonly deviation: readonly number[];
}

/** How far Δβ is spread along a guide, where only statistics are known. */
export interface SpreadTraits {
  /** Standard deviation of δβ(z), 1/m, of the process in `scanned`, else of the one asked. */
  readonly sd: UsedTrait;
  /** At which the correlation of δβ has fallen to 1/e, m. */
  readonly correlationLength: number;
  /**
   * The scan of this very guide that told it, what length of a uniform grating is as wide (mm), and what share of its peak the
   * guide keeps; null: scans nearby, or the platform.
   */
  readonly scanned: {
    readonly waves: ThreeWaves;
    readonly effectiveLength: UsedTrait;
    readonly peakKept: UsedTrait;
  } | null;
}

/** A tuning scan of another process on the same guide: it tells of the asked one what the cross-section explains of it. */
export interface OtherScan {
  readonly waves: ThreeWaves;
  /** The offset of its own Δβ that it found, 1/m. */
  readonly offset: UsedTrait;
  /** The offset that is expected of this guide without it. */
  readonly expected: Uncertain;
  /** Share that scans of other guides have in what is expected, 0…1. */
  readonly read: number;
  /**
   * Of the variance of a parameter's error: the share that makes this guide's scan differ from what is expected of it, and the
   * share in that which is this guide's own for the asked process, too: 0 ≤ own ≤ felt ≤ 1. Left out: 1.
   */
  readonly shares: Partial<
    Readonly<Record<GeometryParameter, { readonly felt: number; readonly own: number }>>
  >;
}

/** Everything that a prediction of one guide rests on; lengths in m at 25 °C. */
export interface GuideInputs {
  readonly id: string;
  /** Cross-section as far as it is known: what the index models are asked with. */
  readonly geometry: GuideGeometry;
  /** What is uncertain about it; `trait.value` is the value in `geometry` (for `width_um` its error against the mask). */
  readonly geometryErrors: readonly { readonly parameter: GeometryParameter; readonly trait: UsedTrait }[];
  /** What of it varies along the guide, where it was read at several places. */
  readonly along?: readonly AlongGuide[];
  readonly length: number;
  readonly period: number;
  readonly poledFrom: number;
  readonly poledLength: number;
  readonly pumpLoss: UsedTrait;
  readonly signal: ArmTraits;
  readonly idler: ArmTraits;
  readonly poling: PolingTraits;
  /**
   * Offset of Δβ (1/m) that a tuning scan of this process found on this guide (then the geometry's errors are in it), or
   * that scans nearby or the platform suggest; null when the calculated Δβ is taken as it is.
   */
  readonly offset: UsedTrait | null;
  /** Offset of Δβ that the lot's guides have on the whole, 1/m; left out: none is known. */
  readonly usualOffset?: number;
  /** Scans of other processes on this guide, where none of the asked one was made. */
  readonly otherScans?: readonly OtherScan[];
  /** Spread of Δβ along the guide beside what `along` says; null or left out where nothing speaks of one. */
  readonly mismatchSpread?: SpreadTraits | null;
}
