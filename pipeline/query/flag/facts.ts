import type { Analyses } from "./analyses.ts";
import type { FoundPeriod } from "./period.ts";
import type { Platform } from "../../../shared/schemas/platform.ts";
import type { CheckedRequest } from "../../../shared/schemas/request.ts";
import type { Basis, Polarisation } from "../../../shared/vocabulary.ts";
import type { CoatingRecord, GuideRecord, LotDesign, Source } from "../../records.ts";
import type { ReadingRef, ReduceRemark, TraitName, TraitRow } from "../../traits/trait_row.ts";

/** Traits that rules may name. */
export const TRAIT_NAMES = [
  "loss_db_cm",
  "coupling_db",
  "mfd_x_um",
  "mfd_y_um",
  "duty",
  "duty_sd",
  "merged",
  "width_error_um",
  "film_thickness_nm",
  "etch_depth_nm",
  "titanium_nm",
  "mismatch_offset_per_m",
  "effective_length_mm",
  "asymmetry",
  "mismatch_sd_per_m",
  "peak_kept",
] as const satisfies readonly TraitName[];

export interface WaferFact extends Source {
  readonly wafer: string;
  readonly diameter_mm: number | null;
  readonly substrate_batch: string | null;
}

export interface StepFact extends Source {
  readonly wafer: string;
  readonly order: number;
  readonly step: string;
  readonly tool: string | null;
  readonly recipe: string | null;
  readonly finished: string | null;
}

export interface QuarantineFact extends Source {
  readonly kind: string;
  readonly column: string;
  readonly value: string;
  readonly reason: string;
  readonly wanted: string;
}

export interface OutcomeFact extends Source {
  readonly unit: string;
  readonly guide_id: string | null;
  readonly die_id: string | null;
  readonly request: string;
  readonly figure: string;
  readonly value: number;
  readonly u_value: number | null;
}

export interface DecisionFact {
  readonly guide_id: string;
  readonly die_id: string;
  readonly wafer: string;
  readonly decision: "accept" | "hold" | "reject";
  readonly probability: number;
  readonly limited_by: string | null;
  readonly matched: boolean;
  readonly unavailable: string | null;
}

export interface FigureFact {
  readonly mean: number | null;
  readonly u: number | null;
  readonly lo: number | null;
  readonly hi: number | null;
  readonly probability: number | null;
  readonly basis: Basis;
  readonly reason: string | null;
}

/** A reading that the others of its trait contradict. */
export interface ContradictionFact {
  readonly trait: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly process: string | null;
  /** Full id of the guide, die or wafer that was read. */
  readonly unit: string;
  readonly value: number;
  readonly expected: number;
  readonly u_expected: number;
  readonly standardised: number;
  readonly p: number;
  readonly readings: readonly ReadingRef[];
}

/** A guide that stands for a die and is not accepted, with one group of traits at target; `all` is every group. */
export interface RestoredFact {
  readonly wafer: string;
  readonly die_id: string;
  readonly guide_id: string;
  readonly trait_group: string;
  readonly probability_as_made: number;
  readonly probability_restored: number;
  readonly decision_as_made: string;
  readonly decision_restored: string;
}

/** A reading that could be taken on a guide, and what it would decide; place 1 is worth most. */
export interface NextReadingFact {
  readonly die_id: string;
  readonly guide_id: string;
  readonly place: number;
  readonly kind: string;
  readonly trait: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly reduction: number;
  readonly p_hold: number;
}

/** What was predicted of a lot for one request. */
export interface PredictionFacts {
  /** True when the user named this request. */
  readonly named: boolean;
  readonly checked: CheckedRequest;
  readonly decisions: readonly DecisionFact[];
  /** Guide → figure → prediction, for the figures that rules look at. */
  readonly figures: ReadonlyMap<string, ReadonlyMap<string, FigureFact>>;
  readonly analyses: Analyses;
}

/** Everything that the rules look at, of one lot. */
export interface LotFacts {
  readonly lot: string;
  readonly started: string | null;
  readonly platform: Platform;
  readonly design: LotDesign;
  readonly wafers: readonly WaferFact[];
  readonly steps: readonly StepFact[];
  /** Coatings that count, the last per die and facet. */
  readonly coatings: readonly CoatingRecord[];
  readonly traits: readonly TraitRow[];
  /** What the traits were computed with. */
  readonly made: MadeWith;
  readonly reduceRemarks: readonly ReduceRemark[];
  readonly quarantine: readonly QuarantineFact[];
  /** Rows read from the files in force. */
  readonly rows: number;
  readonly outcomes: readonly OutcomeFact[];
  readonly periods: readonly FoundPeriod[];
  /** sha256 of the files in force, by name. */
  readonly files: ReadonlyMap<string, string>;
  readonly predictions: readonly PredictionFacts[];
  /** True when the user named the requests; else those are looked at that some guide of the lot matches. */
  readonly requestsNamed: boolean;
}

/** What a number was computed with; numbers are compared only where that is the same. */
export interface MadeWith {
  readonly model: string;
  readonly platform_sha256: string;
  /** Of predictions only. */
  readonly request_sha256?: string;
}

export interface YieldSummary {
  readonly good: number;
  readonly of: number;
  readonly made: MadeWith;
}

/** What earlier and later lots of the platform are compared by. */
export interface LotSummary {
  readonly lot: string;
  /** What the traits were computed with. */
  readonly made: MadeWith;
  /** ISO date; null: it has no place in time. */
  readonly started: string | null;
  readonly wafers: readonly WaferFact[];
  readonly steps: readonly StepFact[];
  /** Series (trait, wavelength, polarisation) → mean of the lot, and spread between dies of a wafer. */
  readonly series: ReadonlyMap<string, SeriesSummary>;
  /** Request → dies accepted, of dies that can be shipped. */
  readonly yields: ReadonlyMap<string, YieldSummary>;
}

/** Dies of a wafer in one series. */
export interface WaferSummary {
  readonly wafer: string;
  /** Means of the dies. */
  readonly values: readonly number[];
  /** Mean of their u². */
  readonly readingVariance: number;
}

export interface SeriesSummary {
  /** Mean of the means of dies. */
  readonly mean: number;
  readonly wafers: readonly WaferSummary[];
}

/** Where a guide of the lot's design is. */
export type GuideFact = GuideRecord;
