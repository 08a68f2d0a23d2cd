import type { Decision, GuideAnalysis } from "../../models/decision/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { type TableShape, type TableStream, tableStream } from "../ledger/mod.ts";
import type { GuideRecord } from "../records.ts";
import { waveOf } from "../traits/role_wave.ts";

/** One row per trait of a reading: a reading that tells several traits has the same worth in each of its rows. */
export const NEXT_READING_SHAPE = {
  lot: "text",
  request: "text",
  die_id: "text",
  guide_id: "text",
  place: "i32",
  kind: "text",
  trait: "text",
  wavelength_nm: "f64",
  polarisation: "text",
  u_reading: "f64",
  u_from: "text",
  doubt: "f64",
  reduction: "f64",
  p_accept: "f64",
  p_hold: "f64",
  p_reject: "f64",
} as const satisfies TableShape;

/**
 * One row per guide and group of traits; `all` is every group together. Both probabilities are of the same draws, of which
 * the decision as made may have had more.
 */
export const RESTORED_SHAPE = {
  lot: "text",
  request: "text",
  wafer: "text",
  die_id: "text",
  guide_id: "text",
  trait_group: "text",
  probability_as_made: "f64",
  probability_restored: "f64",
  decision_as_made: "text",
  decision_restored: "text",
} as const satisfies TableShape;

interface Analysed {
  readonly guide: GuideRecord;
  readonly decision: Decision;
  readonly analysis: GuideAnalysis;
}

/** Analyses of the guides that stand for dies and are not accepted, for one request of one lot. */
export class AnalysisStore {
  readonly #analysed = new Map<number, Analysed>();

  constructor(readonly lot: string, readonly checked: CheckedRequest) {}

  set(position: number, guide: GuideRecord, decision: Decision, analysis: GuideAnalysis): void {
    this.#analysed.set(position, { guide, decision, analysis });
  }

  /** In the order of guides, whichever thread was first. */
  #inOrder(): Analysed[] {
    return [...this.#analysed].sort(([a], [b]) => a - b).map(([, analysed]) => analysed);
  }

  readingTable(): TableStream {
    const rows = this.#inOrder().flatMap(({ guide, analysis }) =>
      analysis.readings.flatMap((next, k) =>
        next.reading.reads.map((read) => ({ guide, next, read, place: k + 1 }))
      )
    );
    const request = this.checked.request.request;
    return tableStream(NEXT_READING_SHAPE, {
      lot: rows.map(() => this.lot),
      request: rows.map(() => request),
      die_id: rows.map((r) => r.guide.die_id),
      guide_id: rows.map((r) => r.guide.guide_id),
      place: rows.map((r) => r.place),
      kind: rows.map((r) => r.next.reading.kind),
      trait: rows.map((r) => r.read.trait),
      wavelength_nm: rows.map((r) => waveOf(this.checked, r.read)?.wavelength_nm ?? null),
      polarisation: rows.map((r) => waveOf(this.checked, r.read)?.polarisation ?? null),
      u_reading: rows.map((r) => r.read.u),
      u_from: rows.map((r) => r.read.from),
      doubt: rows.map((r) => r.next.doubt),
      reduction: rows.map((r) => r.next.reduction),
      p_accept: rows.map((r) => r.next.after.accept),
      p_hold: rows.map((r) => r.next.after.hold),
      p_reject: rows.map((r) => r.next.after.reject),
    });
  }

  restoredTable(): TableStream {
    const rows = this.#inOrder().flatMap((analysed) =>
      analysed.analysis.restored.map((restored) => ({ ...analysed, restored }))
    );
    const request = this.checked.request.request;
    return tableStream(RESTORED_SHAPE, {
      lot: rows.map(() => this.lot),
      request: rows.map(() => request),
      wafer: rows.map((r) => r.guide.wafer),
      die_id: rows.map((r) => r.guide.die_id),
      guide_id: rows.map((r) => r.guide.guide_id),
      trait_group: rows.map((r) => r.restored.group),
      probability_as_made: rows.map((r) => r.analysis.probability),
      probability_restored: rows.map((r) => r.restored.probability),
      decision_as_made: rows.map((r) => r.decision),
      decision_restored: rows.map((r) => r.restored.decision),
    });
  }
}
