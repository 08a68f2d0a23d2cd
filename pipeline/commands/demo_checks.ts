import type { Expectation, PlantedFault } from "../../fixtures/demo_lots.ts";
import { quantileOfSorted } from "../../shared/statistics.ts";
import { dieOfGuide, waferOf } from "../../shared/ids.ts";
import type { Ledger } from "../ledger/mod.ts";
import { type RankedEntry, rankGuides } from "../query/rank.ts";
import { runSql } from "../query/sql.ts";
import type { LoadedRequest } from "../requests.ts";
import { missedContradiction } from "./demo_contradictions.ts";

/** Compares what the program says with what was planted in the demo's lots. */
export class DemoChecks {
  readonly #rankings = new Map<string, Promise<ReadonlyMap<string, RankedEntry>>>();

  constructor(readonly ledger: Ledger, readonly requests: readonly LoadedRequest[]) {}

  /** Expectations of a fault that the program did not meet, as sentences. */
  async missed(fault: PlantedFault): Promise<string[]> {
    const out: string[] = [];
    for (const e of fault.expect) out.push(...await this.#check(fault, e));
    return out;
  }

  async #check(fault: PlantedFault, e: Expectation): Promise<string[]> {
    const { lot } = fault;
    switch (e.kind) {
      case "quarantined":
        return await this.#quarantined(fault, e.file, e.rows);
      case "remark": {
        const remarks = await this.#texts(
          `SELECT statement FROM remarks WHERE lot = ${text(lot)} AND code = ${text(e.code)}`,
        );
        return remarks.some((r) => r.includes(e.about)) ? [] : [`a remark ${e.code} about ${e.about}`];
      }
      case "limited-by":
        return await this.#guides(
          e.request,
          lot,
          e.guides,
          (g) =>
            g.decision === "reject" && g.limited_by === e.figure
              ? null
              : `${g.guide} is ${g.decision}, limited by ${g.limited_by}`,
        );
      case "no-operating-point":
        return await this.#guides(
          e.request,
          lot,
          e.guides,
          (g) =>
            g.figures.operating_pump_nm.mean === null && g.decision === "reject"
              ? null
              : `${g.guide} has an operating point`,
        );
      case "never-accepted": {
        const accepted = await this.#texts(
          `SELECT guide_id FROM decisions WHERE lot = ${text(lot)} AND decision = 'accept' AND die_id IN (${
            e.dies.map(text).join(", ")
          })`,
        );
        return accepted.map((g) => `${g} is accepted`);
      }
      case "reading-doubted":
        return await this.#doubted(lot, e.file, e.line, e.unit);
      case "contradicted":
        return await missedContradiction(this.ledger, lot, e);
      case "walls-not-exact": {
        const exact = await this.#texts(
          `SELECT unit FROM traits WHERE lot = ${
            text(lot)
          } AND trait = 'walls_complete' AND value = 1 AND unit = ${text(e.guide)}`,
        );
        const used = await this.#texts(
          `SELECT guide_id FROM used_traits WHERE lot = ${text(lot)} AND trait = 'walls' AND guide_id = ${
            text(e.guide)
          }`,
        );
        return exact.length + used.length === 0 ? [] : [`the walls of ${e.guide} are used as exact`];
      }
      case "basis-platform":
        return await this.#guides(e.request, lot, e.guides, (g) => {
          const { basis } = g.figures[e.figure];
          return basis === "platform" ? null : `${e.figure} of ${g.guide} rests on ${basis}`;
        });
      case "wafer-loss":
        return await this.#waferLoss(lot, e);
    }
  }

  async #quarantined(fault: PlantedFault, file: string, rows: number): Promise<string[]> {
    // A file may hold faults of several guides: where the fault is one guide's, only its rows count.
    const own = fault.scope === "guide"
      ? ` AND "row" LIKE ${text(`%${fault.unit.split("/").slice(1).join("%")}%`)}`
      : "";
    const found = await this.#texts(
      `SELECT DISTINCT source_line::VARCHAR FROM quarantine WHERE lot = ${text(fault.lot)} AND file_name = ${
        text(file)
      }${own}`,
    );
    return found.length === rows ? [] : [`${rows} rows of ${file} quarantined; found ${found.length}`];
  }

  async #doubted(lot: string, file: string, line: number, unit: string): Promise<string[]> {
    const remarks = await this.#texts(
      `SELECT statement FROM reduce_remarks WHERE lot = ${text(lot)} AND unit = ${text(unit)}`,
    );
    return remarks.some((r) => r.includes(`${file}:${line}`))
      ? []
      : [`${file}:${line} of ${unit} refused or named an outlier`];
  }

  async #waferLoss(lot: string, e: Extract<Expectation, { kind: "wafer-loss" }>): Promise<string[]> {
    const entries = await this.#ranking(e.request, lot);
    const median = (wafer: string) => {
      const means = [...entries.values()].filter((g) => waferOf(g.guide) === wafer).map((g) =>
        g.figures[e.figure].mean!
      );
      return quantileOfSorted(means.sort((a, b) => a - b), 0.5);
    };
    const [high, low] = [median(e.wafer), median(e.other)];
    return high > e.above && low < e.below
      ? []
      : [`median ${e.figure} is ${high.toFixed(3)} on ${e.wafer} and ${low.toFixed(3)} on ${e.other}`];
  }

  async #guides(
    request: string,
    lot: string,
    guides: readonly string[],
    test: (g: RankedEntry) => string | null,
  ): Promise<string[]> {
    const entries = await this.#ranking(request, lot);
    const wrong = guides.map((id) => {
      const entry = entries.get(id);
      return entry === undefined ? `${id} is not ranked (die ${dieOfGuide(id)})` : test(entry);
    }).filter((w) => w !== null);
    return wrong.length <= 2
      ? wrong
      : [...wrong.slice(0, 2), `… and ${wrong.length - 2} more of ${guides.length}`];
  }

  #ranking(request: string, lot: string): Promise<ReadonlyMap<string, RankedEntry>> {
    const key = `${request}|${lot}`;
    let held = this.#rankings.get(key);
    if (held === undefined) {
      const checked = this.requests.find((r) => r.name === request)!;
      held = rankGuides(this.ledger, checked, { lots: [lot], allGuides: true, top: null })
        .then((ranking) => new Map(ranking.dies.map((d) => [d.guide, d])));
      this.#rankings.set(key, held);
    }
    return held;
  }

  async #texts(query: string): Promise<string[]> {
    return (await runSql(this.ledger, query)).rows.map((row) => String(row[0]));
  }
}

const text = (value: string): string => `'${value.replaceAll("'", "''")}'`;
