import type { Decision, GuidePrediction } from "../../models/decision/mod.ts";
import { type Figure, FIGURES } from "../../shared/schemas/figures.ts";
import { BASES } from "../../shared/vocabulary.ts";
import { type TableShape, type TableStream, tableStream } from "../ledger/mod.ts";
import type { GuideRecord, LotDesign } from "../records.ts";

export const FIGURE_SHAPE = {
  lot: "text",
  request: "text",
  die_id: "text",
  guide_id: "text",
  figure: "text",
  mean: "f64",
  u: "f64",
  u_linear: "f64",
  lo: "f64",
  hi: "f64",
  probability: "f64",
  basis: "text",
  reason: "text",
} as const satisfies TableShape;

export const DECISION_SHAPE = {
  lot: "text",
  request: "text",
  wafer: "text",
  die_id: "text",
  guide_id: "text",
  guide_group: "text",
  guide_order: "i32",
  probability: "f64",
  decision: "text",
  limited_by: "text",
  draws: "i32",
  settled: "bool",
  matched: "f64",
  unavailable: "text",
  other_temperatures: "text",
  window_signal: "text",
  window_idler: "text",
  exchange_delay_ps: "f64",
  grid_points: "i32",
  remarks: "text",
} as const satisfies TableShape;

const NUMBER_FIELDS = ["mean", "u", "uLinear", "lo", "hi", "probability"] as const;
type NumberField = typeof NUMBER_FIELDS[number];
const NUMBERS = NUMBER_FIELDS.length;

/** Figures of a lot's guides for one request, flat: a guide with n figures costs 6 numbers and a byte each. */
export class FigureStore {
  readonly #numbers: Float64Array;
  readonly #basis: Uint8Array;
  readonly #present: Uint8Array;
  readonly #reasons = new Map<number, string>();
  readonly #predictions: (Omit<GuidePrediction, "figures"> | null)[];

  constructor(readonly lot: string, readonly request: string, readonly guides: readonly GuideRecord[]) {
    const cells = guides.length * FIGURES.length;
    this.#numbers = new Float64Array(NUMBERS * cells).fill(NaN);
    this.#basis = new Uint8Array(cells);
    this.#present = new Uint8Array(cells);
    this.#predictions = guides.map(() => null);
  }

  /** Sets the prediction of a guide, or one of more draws in the place of the first. */
  set(guide: number, prediction: GuidePrediction): void {
    const { figures, ...rest } = prediction;
    this.#predictions[guide] = rest;
    for (const f of figures) {
      const cell = guide * FIGURES.length + FIGURES.indexOf(f.figure);
      NUMBER_FIELDS.forEach((name, k) => this.#numbers[NUMBERS * cell + k] = f[name] ?? NaN);
      this.#basis[cell] = BASES.indexOf(f.basis);
      this.#present[cell] = 1;
      if (f.reason === null) this.#reasons.delete(cell);
      else this.#reasons.set(cell, f.reason);
    }
  }

  probability(guide: number): number {
    return this.#predictions[guide]!.probability;
  }

  decision(guide: number): Decision {
    return this.#predictions[guide]!.decision;
  }

  /** Share of the draws with an operating point. */
  matched(guide: number): number {
    return this.#predictions[guide]!.matched;
  }

  settled(guide: number): boolean {
    return this.#predictions[guide]!.settled;
  }

  /** Mean of a figure, null where it does not exist. */
  mean(guide: number, figure: Figure): number | null {
    const value = this.#numbers[NUMBERS * (guide * FIGURES.length + FIGURES.indexOf(figure))]!;
    return Number.isNaN(value) ? null : value;
  }

  figureTable(): TableStream {
    const cells = [...this.#present.keys()].filter((cell) => this.#present[cell] === 1);
    const guideOf = (cell: number) => this.guides[Math.floor(cell / FIGURES.length)]!;
    const number = (name: NumberField) =>
      Float64Array.from(cells, (cell) => this.#numbers[NUMBERS * cell + NUMBER_FIELDS.indexOf(name)]!);
    return tableStream(FIGURE_SHAPE, {
      lot: cells.map(() => this.lot),
      request: cells.map(() => this.request),
      die_id: cells.map((c) => guideOf(c).die_id),
      guide_id: cells.map((c) => guideOf(c).guide_id),
      figure: cells.map((c) => FIGURES[c % FIGURES.length]!),
      mean: number("mean"),
      u: number("u"),
      u_linear: number("uLinear"),
      lo: number("lo"),
      hi: number("hi"),
      probability: number("probability"),
      basis: cells.map((c) => BASES[this.#basis[c]!]!),
      reason: cells.map((c) => this.#reasons.get(c) ?? null),
    });
  }

  /** Decisions: a guide on a die that can't be shipped is rejected whatever its probability, with the reason. */
  decisionTable(unavailable: ReadonlyMap<string, string>): TableStream {
    const rows = this.#predictions.map((p, k) => ({ p: p!, guide: this.guides[k]! }));
    const reason = (g: GuideRecord) => unavailable.get(g.die_id) ?? null;
    const window = (w: readonly [number, number] | undefined) =>
      w === undefined ? null : w.map((l) => (l * 1e9).toFixed(3)).join(" to ");
    return tableStream(DECISION_SHAPE, {
      lot: rows.map(() => this.lot),
      request: rows.map(() => this.request),
      wafer: rows.map((r) => r.guide.wafer),
      die_id: rows.map((r) => r.guide.die_id),
      guide_id: rows.map((r) => r.guide.guide_id),
      guide_group: rows.map((r) => r.guide.group),
      // Ids in their natural order (g2 before g10), so that ties can be broken by id in SQL.
      guide_order: rows.map((_, k) => k),
      probability: rows.map((r) => r.p.probability),
      decision: rows.map((r) => reason(r.guide) === null ? r.p.decision : "reject"),
      limited_by: rows.map((r) => r.p.limitedBy),
      draws: rows.map((r) => r.p.draws),
      settled: rows.map((r) => r.p.settled),
      matched: rows.map((r) => r.p.matched),
      unavailable: rows.map((r) => reason(r.guide)),
      other_temperatures: rows.map((r) =>
        r.p.otherTemperatures.length === 0 ? null : r.p.otherTemperatures.map((t) => t.toFixed(2)).join(", ")
      ),
      window_signal: rows.map((r) => window(r.p.pairs?.windowS)),
      window_idler: rows.map((r) => window(r.p.pairs?.windowI)),
      exchange_delay_ps: rows.map((r) =>
        r.p.pairs?.exchangeDelay == null ? null : r.p.pairs.exchangeDelay * 1e12
      ),
      grid_points: rows.map((r) => r.p.pairs?.gridPoints ?? null),
      remarks: rows.map((r) => r.p.remarks.length === 0 ? null : r.p.remarks.join("\n")),
    });
  }
}

/** Why dies can't be shipped: listed in lot.json, or cut shorter than designed for a loss measurement. */
export function unavailableDies(
  design: LotDesign,
  cutback: readonly {
    readonly die_id: string | null;
    readonly guide_id: string | null;
    readonly length_mm: number;
  }[],
): Map<string, string> {
  const out = new Map<string, string>();
  for (const { die_id, guide_id, length_mm } of cutback) {
    if (die_id === null) continue;
    const designed = guide_id === null
      ? Math.min(...(design.guidesOfDie.get(die_id) ?? []).map((g) => g.length_mm))
      : design.guideById.get(guide_id)?.length_mm ?? 0;
    // A micrometre of slack: a die measured at its full length is not cut.
    if (length_mm < designed - 1e-3) {
      out.set(die_id, `cut back to ${length_mm} mm of ${designed} mm for a loss measurement`);
    }
  }
  for (const [die, { reason }] of design.unavailable) out.set(die, reason);
  return out;
}
