// What a review holds, as plain objects: gathered by the query stage, shown by the review stage.
import type { ReadingRef } from "./traits/trait_row.ts";
import type { Basis } from "../shared/vocabulary.ts";

export type Verdict = "accept" | "hold" | "reject";

export interface ReviewSuspect {
  readonly name: string;
  readonly sentence: string;
  readonly p_value: number;
  readonly verdict: string;
}

export interface ReviewFlag {
  readonly scope: string;
  readonly id: string;
  readonly rule: string;
  readonly severity: "act" | "watch" | "note";
  readonly brief: string;
  readonly statement: string;
  readonly readings: readonly ReadingRef[];
  readonly dies: readonly string[];
  readonly suspects: readonly ReviewSuspect[];
}

/** Confidence of every interval of a review. */
export const CONFIDENCE = 0.95;

export interface Interval {
  readonly low: number;
  readonly high: number;
}

/** Good dies to be expected from the probabilities, with 95 % ranges of their number. */
export interface ExpectedDies {
  readonly dies: number;
  /** If dies are good or bad independently of each other. */
  readonly low: number;
  readonly high: number;
  /** If all dies of a wafer share their doubts: the widest that the number can scatter. */
  readonly together_low: number;
  readonly together_high: number;
}

/** Dies accepted, of those that can be shipped; intervals at 95 %. */
export interface ShareOf {
  readonly good: number;
  readonly hold: number;
  readonly of: number;
  /** Null for none of none. */
  readonly value: number | null;
  /** Exact; of several wafers widened for dies that share their wafer's fate. */
  readonly low: number;
  readonly high: number;
  readonly counted: "dies" | "wafers";
  /** Clopper and Pearson, and Wilson, with every die as evidence of its own. */
  readonly exact: Interval;
  readonly score: Interval;
  /** Null for no die. */
  readonly expected: ExpectedDies | null;
}

export interface FigureValue {
  readonly mean: number | null;
  readonly u: number | null;
  readonly lo: number | null;
  readonly hi: number | null;
  readonly probability: number | null;
  readonly basis: Basis;
  readonly reason?: string;
}

export interface RankedDie {
  readonly die: string;
  readonly guide: string;
  readonly decision: Verdict;
  readonly probability: number;
  readonly limited_by: string | null;
  readonly qualifying_guides: number;
  readonly guides_of_die: number;
  readonly matched: boolean;
  readonly unavailable: string | null;
  /** Readings of the guide that the others contradict, as sentences. */
  readonly contradicted: readonly string[];
  readonly operating_temperature_c: FigureValue;
  /** Required figures. */
  readonly figures: Readonly<Record<string, FigureValue>>;
}

/** One factor of the heralding budget. */
export interface BudgetRow {
  readonly factor: string;
  readonly signal: FigureValue;
  readonly idler: FigureValue;
}

export interface Budget {
  readonly which: "best" | "median";
  readonly die: string;
  readonly guide: string;
  readonly rows: readonly BudgetRow[];
}

export interface LimitRow {
  readonly figure: string;
  readonly rejected: number;
  readonly on_hold: number;
  /** Dies that would be accepted if this requirement alone were met: all others leave no more doubt than the request allows. */
  readonly would_pass: number;
  readonly wafers: readonly string[];
}

/** What the yield would be with traits at their targets. */
export interface GainReview {
  readonly scope: "lot" | "wafer";
  readonly id: string;
  /** Dies that can be shipped. */
  readonly dies: number;
  readonly as_made: number;
  readonly all_at_target: number;
  /** One group of traits at its target, the others as made; largest rise first. */
  readonly groups: readonly {
    readonly group: string;
    readonly words: string;
    /** Dies more than as made. */
    readonly dies: number;
    readonly yield: number;
    readonly rise: number;
    /** Of the whole rise; null where that is 0. Shares and the interaction's sum to 1. */
    readonly share: number | null;
    /** Rise of the expected number of good dies, from the probabilities. */
    readonly expected: number;
  }[];
  /** What the single rises leave of the whole: above 0 several have to be put right together, below 0 either of several would do. */
  readonly interaction: number;
  readonly interaction_share: number | null;
  readonly expected_all: number;
}

/** What dies on hold lack. */
export interface MissingReading {
  readonly request: string;
  readonly kind: string;
  readonly words: string;
  readonly dies: readonly string[];
  /** How many of them it is expected to decide. */
  readonly decided: number;
}

export interface RequestReview {
  readonly request: string;
  readonly process: string;
  readonly description: string;
  readonly requirements: readonly {
    readonly figure: string;
    readonly at_least: number | null;
    readonly at_most: number | null;
  }[];
  /** What the dies are ordered by. */
  readonly order_by: string;
  readonly decide: { readonly accept_at: number; readonly reject_below: number };
  readonly total: ShareOf;
  readonly wafers: readonly (ShareOf & { readonly wafer: string })[];
  /** By mask group: dies with an accepted guide of the group, of those that have guides of it. */
  readonly groups: readonly (ShareOf & { readonly group: string; readonly matched: boolean })[];
  readonly limits: readonly LimitRow[];
  readonly limits_by_wafer: readonly { readonly wafer: string; readonly limits: readonly LimitRow[] }[];
  /** The lot first, then its wafers; empty where the prediction holds no such analysis. */
  readonly gains: readonly GainReview[];
  readonly missing_readings: readonly MissingReading[];
  readonly ranked: readonly RankedDie[];
  readonly budgets: readonly Budget[];
  readonly rests_on: readonly {
    readonly role: string;
    readonly trait: string;
    readonly basis: Basis;
    readonly guides: number;
  }[];
}

export interface DieReview {
  readonly die: string;
  readonly wafer: string;
  readonly x_mm: number;
  readonly y_mm: number;
  readonly unavailable: string | null;
}

export interface TrendReview {
  readonly wafer: string;
  readonly dies: number;
  readonly slope_p: number | null;
  readonly radial_p: number | null;
  readonly across_wafer: number | null;
  readonly centre_to_edge: number | null;
  readonly edge_difference: number | null;
  readonly edge_p: number | null;
  readonly neighbours_i: number | null;
  readonly neighbours_p: number | null;
  readonly sentence: string;
}

export interface TraitReview {
  readonly key: string;
  readonly words: string;
  readonly unit: string;
  readonly dies: readonly {
    readonly die: string;
    readonly wafer: string;
    readonly value: number;
    readonly u: number;
    readonly rows: number;
  }[];
  readonly trends: readonly TrendReview[];
  /** Where the spread sits; empty where it can't be told. */
  readonly shares: readonly { readonly level: string; readonly share: number; readonly sd: number }[];
}

export interface ChartReview {
  readonly key: string;
  readonly words: string;
  readonly unit: string;
  readonly centre: number;
  readonly lower: number;
  readonly upper: number;
  readonly points: readonly { readonly lot: string; readonly value: number; readonly z: number }[];
  /** Sentences about the last point; empty when it is in line. */
  readonly signals: readonly string[];
}

/** Means and spreads of wafers over lots; those of the reviewed lot last. */
export interface WaferChartReview {
  readonly key: string;
  readonly words: string;
  readonly unit: string;
  readonly centre: number;
  /** What wafers of good lots keep, from the lots before; null where those are too few. */
  readonly limits: { readonly lower: number; readonly upper: number } | null;
  readonly lots_before: number;
  readonly within_sd: number;
  readonly between_sd: number | null;
  readonly points: readonly {
    readonly lot: string;
    readonly wafer: string;
    readonly dies: number;
    readonly mean: number;
    /** Limits from the scatter of the dies alone (X-bar). */
    readonly within_lower: number;
    readonly within_upper: number;
    readonly z: number | null;
    /** Null for a single die. */
    readonly s: number | null;
    readonly s_centre: number | null;
    readonly s_lower: number | null;
    readonly s_upper: number | null;
  }[];
  readonly sentence: string;
}

export interface CapabilityReview {
  readonly key: string;
  readonly words: string;
  readonly unit: string;
  readonly rule: string;
  readonly limits: string;
  readonly lower: number | null;
  readonly upper: number | null;
  /** Null: the whole lot. */
  readonly wafer: string | null;
  readonly dies: number;
  readonly effective_dies: number;
  readonly mean: number | null;
  readonly sd: number | null;
  readonly cp: CapabilityIndex | null;
  readonly cpk: CapabilityIndex | null;
  readonly cpk_at_least: number | null;
  /** Share of normal dies beyond the limits. */
  readonly outside: number | null;
  /** Why there is none. */
  readonly refused: string | null;
}
export interface CapabilityIndex {
  readonly value: number;
  readonly lo: number;
  readonly hi: number;
}

export interface LotYieldRow {
  readonly lot: string;
  readonly started: string | null;
  readonly request: string;
  readonly good: number;
  readonly of: number;
  readonly low: number;
  readonly high: number;
  readonly exact: Interval;
  readonly score: Interval;
}

export interface Answers {
  readonly how: readonly string[];
  readonly out: readonly string[];
  readonly behind: readonly string[];
  readonly pay_off: readonly string[];
  readonly goes: readonly string[];
}

export interface ReviewData {
  readonly lot: string;
  readonly platform: string;
  readonly started: string | null;
  readonly counts: {
    readonly wafers: number;
    readonly dies: number;
    readonly unavailable: number;
    readonly guides: number;
    readonly rows: number;
    readonly quarantined: number;
  };
  readonly answers: Answers;
  readonly flags: readonly ReviewFlag[];
  readonly requests: readonly RequestReview[];
  /** Requests predicted that no guide of the lot matches. */
  readonly requests_without_match: readonly string[];
  readonly wafers: readonly {
    readonly wafer: string;
    readonly diameter_mm: number | null;
    readonly substrate_batch: string | null;
    readonly steps: readonly {
      readonly step: string;
      readonly tool: string | null;
      readonly recipe: string | null;
      readonly finished: string | null;
    }[];
  }[];
  readonly coatings: readonly {
    readonly coating_run: string;
    readonly facet: string;
    readonly dies: number;
  }[];
  readonly dies: readonly DieReview[];
  readonly traits: readonly TraitReview[];
  readonly charts: readonly ChartReview[];
  readonly wafer_charts: readonly WaferChartReview[];
  readonly capabilities: readonly CapabilityReview[];
  readonly lots: readonly LotYieldRow[];
  /** Earlier lots that are not compared, and why, in words. */
  readonly left_out: readonly string[];
  readonly coverage: readonly {
    readonly what: string;
    readonly guides: number;
    readonly dies: number;
    readonly of_guides: number;
    readonly of_dies: number;
  }[];
  readonly quarantine: readonly {
    readonly file: string;
    readonly line: number;
    readonly column: string;
    readonly value: string;
    readonly reason: string;
    readonly wanted: string;
  }[];
  readonly remarks: readonly string[];
  readonly provenance: {
    readonly program: string;
    readonly model: string;
    readonly runs: readonly {
      readonly run: string;
      readonly kind: string;
      readonly request: string | null;
      readonly model: string;
    }[];
    readonly files: readonly { readonly name: string; readonly sha256: string }[];
    readonly platform_sha256: string;
    readonly requests: readonly { readonly request: string; readonly sha256: string }[];
  };
  readonly cautions: readonly string[];
}

/** One request on a die sheet. */
export interface SheetRequest {
  readonly request: string;
  readonly description: string;
  readonly decision: Verdict;
  readonly probability: number;
  readonly guide: string;
  readonly matched: boolean;
  readonly limited_by: string | null;
  readonly requirements: RequestReview["requirements"];
  /** Figures that the sheet shows: operating point, required ones, and the usual ones of the process. */
  readonly figures: Readonly<Record<string, FigureValue>>;
  readonly other_temperatures_c: readonly number[];
  readonly oven_c: readonly [number, number];
  readonly budget: readonly BudgetRow[];
  /** What the request asks of the pump, and what the guide allows, in words. */
  readonly pump: readonly string[];
  readonly remarks: readonly string[];
}

/** What was read on a die or its recommended guides. */
export interface SheetReading {
  readonly trait: string;
  readonly unit: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: string | null;
  readonly value: number;
  readonly u: number;
  readonly method: string;
  readonly readings: readonly ReadingRef[];
}

export interface SheetData {
  readonly die: string;
  readonly lot: string;
  readonly platform: string;
  readonly wafer: string;
  readonly substrate_batch: string | null;
  readonly started: string | null;
  readonly x_mm: number;
  readonly y_mm: number;
  readonly unavailable: string | null;
  readonly guides: readonly {
    readonly guide: string;
    readonly group: string | null;
    readonly width_um: number;
    readonly period_um: number;
    readonly length_mm: number;
  }[];
  readonly steps: ReviewData["wafers"][number]["steps"];
  readonly coatings: readonly {
    readonly facet: string;
    readonly coating_run: string;
    readonly counts: boolean;
  }[];
  readonly requests: readonly SheetRequest[];
  readonly readings: readonly SheetReading[];
  readonly provenance: ReviewData["provenance"];
  readonly cautions: readonly string[];
}
