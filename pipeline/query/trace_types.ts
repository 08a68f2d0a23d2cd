import type { Role } from "../../models/decision/mod.ts";
import type { Figure } from "../../shared/schemas/figures.ts";
import type { Basis, Polarisation } from "../../shared/vocabulary.ts";
import type { Source } from "../records.ts";

/**
 * A reading under a trait. A long stretch of lines of one file (walls, points of a scan) is one entry: then `value` is what
 * stands on `source_line`, `value_last` what stands on `source_line_last`, and `rows` counts all between.
 */
export interface TracedReading extends Source {
  readonly table: string;
  /** Column of the table that `value` is from. */
  readonly quantity: string;
  /** Full id of what was read. */
  readonly unit: string;
  readonly value: number;
  /** Standard uncertainty as stated with the reading; null when none was. */
  readonly u: number | null;
  readonly source_line_last?: number;
  readonly value_last?: number;
  readonly rows: number;
  /** What else the row says: length, wavelength, instrument … */
  readonly row: Readonly<Record<string, unknown>>;
}

/** A trait as the readings of one unit gave it, before it was pooled with others. */
export interface TracedTraitRow {
  readonly trait: string;
  readonly scope: string;
  readonly unit: string;
  readonly width_um: number | null;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly process: string | null;
  readonly method: string;
  readonly value: number;
  readonly u: number;
  readonly u_from: "stated" | "platform" | "fit";
  readonly detail: string | null;
  readonly readings: readonly TracedReading[];
}

/** A trait in the role that it plays for the figure. */
export interface TracedTrait {
  readonly role: Role;
  readonly trait: string;
  readonly value: number | null;
  readonly u: number | null;
  readonly basis: Basis;
  /** Unit whose readings were used, or the platform. */
  readonly from: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  /** Farthest reading used, (λ_reading − λ)/λ. */
  readonly distance: number | null;
  readonly note: string | null;
  /**
   * Share of the value that each has: the guide's own readings, those of its die, wafer, lot (each without the nearer ones),
   * of other lots, and the platform's default; they sum to 1. Null where the trait is not pooled.
   */
  readonly shares: TracedShares | null;
  /** Trait rows (or stretches of readings) that the prediction used. */
  readonly readings_used: number;
  readonly measured: readonly TracedTraitRow[];
  /** Readings used as they are, without a trait row in between. */
  readonly readings: readonly TracedReading[];
}

export interface TracedShares {
  readonly own: number;
  readonly die: number;
  readonly wafer: number;
  readonly lot: number;
  readonly other_lots: number;
  readonly platform: number;
}

/** A default of the platform that stood in. */
export interface TracedDefault {
  readonly default: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly value: number | null;
  readonly u: number | null;
  readonly roles: readonly Role[];
}

export interface TracedStep extends Source {
  readonly wafer: string;
  readonly order: number;
  readonly step: string;
  readonly tool: string | null;
  readonly recipe: string | null;
  readonly finished: string | null;
  readonly settings: Readonly<Record<string, unknown>>;
}

export interface TracedCoating extends Source {
  readonly facet: "in" | "out";
  readonly coating_run: string;
  readonly entry: number;
  /** False for a coating that a later entry of the same facet replaced. */
  readonly counts: boolean;
}

export interface TracedDesign extends Source {
  readonly width_um: number;
  readonly period_um: number;
  readonly length_mm: number;
  readonly poled_from_mm: number;
  readonly poled_length_mm: number;
}

/** A figure of a guide with everything that it rests on. */
export interface Trace {
  readonly figure: Figure;
  readonly request: string;
  /** Of the request's file; with a spectrum of its own, of both files' sha256s, one per line. */
  readonly request_sha256: string;
  readonly lot: string;
  readonly die: string;
  readonly guide: string;
  readonly mean: number | null;
  readonly u: number | null;
  readonly lo: number | null;
  readonly hi: number | null;
  readonly probability: number | null;
  readonly basis: Basis;
  readonly reason?: string;
  /** Why the die can't be shipped. */
  readonly unavailable?: string;
  /** The run that predicted the figure. */
  readonly run: string;
  readonly model: string;
  readonly program: string;
  readonly runs: {
    readonly predict: string;
    readonly reduce: string;
    readonly ingest: readonly string[];
    /** Runs of traits of the other lots that the traits were pooled with. */
    readonly other_lots: readonly string[];
  };
  readonly remarks: readonly string[];
  readonly traits: readonly TracedTrait[];
  readonly platform: {
    readonly platform: string;
    /** Of the platform's file; with tables, of all files' sha256s, one per line. */
    readonly sha256: string;
    readonly defaults: readonly TracedDefault[];
  };
  readonly design: TracedDesign;
  readonly wafer: {
    readonly wafer: string;
    readonly diameter_mm: number | null;
    readonly substrate_batch: string | null;
  };
  readonly steps: readonly TracedStep[];
  readonly coatings: readonly TracedCoating[];
  /** The request as the run holds it. */
  readonly request_definition: unknown;
}
