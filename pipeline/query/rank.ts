import { type Figure, figureAbsence, FIGURES } from "../../shared/schemas/figures.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Basis } from "../../shared/vocabulary.ts";
import type { Ledger } from "../ledger/mod.ts";
import { bestReadings, type ReadingAdvice } from "./reading_advice.ts";
import { ledgerTableNames } from "./ledger_tables.ts";
import { type Engine, type QueryResult } from "./engine.ts";
import { engineWith } from "./sql.ts";

/** A figure in the output: all null, with the reason, where it does not exist. */
export interface RankedFigure {
  readonly mean: number | null;
  readonly u: number | null;
  readonly lo: number | null;
  readonly hi: number | null;
  readonly probability: number | null;
  readonly basis: Basis;
  readonly reason?: string;
}

/** A die by its best guide, or a guide. */
export interface RankedEntry {
  readonly die: string;
  readonly guide: string;
  readonly decision: "accept" | "hold" | "reject";
  readonly probability: number;
  readonly limited_by: string | null;
  /** Share of the draws that match within the oven or the pump's range; the others meet no requirement that needs it. */
  readonly matched: number;
  readonly qualifying_guides: number;
  readonly guides_of_die: number;
  /** Why the die can't be shipped; left out when it can. */
  readonly unavailable?: string;
  readonly other_temperatures_c?: readonly number[];
  readonly windows_nm?: { readonly signal: readonly number[]; readonly idler: readonly number[] };
  readonly exchange_delay_ps?: number;
  readonly remarks?: readonly string[];
  /** For a held guide that stands for its die: the reading that would take away most of the doubt. */
  readonly next_reading?: ReadingAdvice;
  readonly figures: Readonly<Record<Figure, RankedFigure>>;
}

export interface Ranking {
  readonly request: string;
  readonly lots: readonly string[];
  readonly guides_considered: number;
  readonly dies: readonly RankedEntry[];
}

export interface RankOptions {
  readonly lots: readonly string[];
  readonly allGuides: boolean;
  readonly top: number | null;
}

/** Ranks dies (or guides) for a request whose predictions are in the ledger. */
export async function rankGuides(
  ledger: Ledger,
  checked: CheckedRequest,
  options: RankOptions,
): Promise<Ranking> {
  // A ledger whose predictions are older than the analysis ranks without it.
  const held = (await ledgerTableNames(ledger)).includes(NEXT_READINGS);
  using engine = await engineWith(ledger, held ? [...RANKED_FROM, NEXT_READINGS] : RANKED_FROM, {
    lots: options.lots,
  });
  const ranking = await rankIn(engine, checked, options);
  if (!held) return ranking;
  const advice = bestReadings(engine, checked.request.request);
  return {
    ...ranking,
    dies: ranking.dies.map((die) => {
      const next_reading = advice.get(die.guide);
      return next_reading === undefined ? die : { ...die, next_reading };
    }),
  };
}

const NEXT_READINGS = "next_readings";

/** What a ranking reads. */
export const RANKED_FROM: readonly string[] = ["ranked_guides", "figures"];

/** The same from an engine that holds {@link RANKED_FROM} of the lots and no others. */
export async function rankIn(
  engine: Engine,
  checked: CheckedRequest,
  options: RankOptions,
): Promise<Ranking> {
  const { request } = checked.request;
  const template = await Deno.readTextFile(new URL("./rank_guides.sql", import.meta.url));
  const text = template
    .replaceAll("{order_by}", quoted(checked.orderBy))
    .replaceAll("{request}", quoted(request))
    .replaceAll("{direction}", checked.descending ? "DESC" : "ASC")
    .replaceAll("{all_guides}", options.allGuides ? "true" : "false");
  const considered = engine.query(`SELECT count(*) FROM ranked_guides WHERE request = ${quoted(request)}`)
    .rows[0]![0] as number;
  const all = objects(engine.query(text));
  const rows = options.top === null ? all : all.slice(0, options.top);
  const figures = figuresOf(engine, checked, new Set(rows.map((r) => r.guide_id as string)));
  return {
    request,
    lots: options.lots,
    guides_considered: considered,
    dies: rows.map((row) => entry(row, figures.get(row.guide_id as string) ?? new Map(), checked)),
  };
}

const quoted = (text: string): string => `'${text.replaceAll("'", "''")}'`;

type Row = Record<string, unknown>;

const objects = ({ columns, rows }: QueryResult): Row[] =>
  rows.map((row) => Object.fromEntries(columns.map((c, k) => [c.name, row[k]])));

function figuresOf(
  engine: Engine,
  checked: CheckedRequest,
  guides: ReadonlySet<string>,
): Map<string, Map<string, RankedFigure>> {
  const byGuide = new Map<string, Map<string, RankedFigure>>();
  const some = guides.size <= 1000 ? `AND guide_id IN (${[...guides].map(quoted).join(", ") || "NULL"})` : "";
  const { rows } = engine.query(
    `SELECT guide_id, figure, mean, u, lo, hi, probability, basis, reason FROM figures
     WHERE request = ${quoted(checked.request.request)} ${some}`,
  );
  for (const [guide, figure, mean, u, lo, hi, probability, basis, reason] of rows as unknown as FigureRow[]) {
    if (!guides.has(guide)) continue;
    let held = byGuide.get(guide);
    if (held === undefined) byGuide.set(guide, held = new Map());
    held.set(figure, { mean, u, lo, hi, probability, basis, ...(reason === null ? {} : { reason }) });
  }
  return byGuide;
}
type FigureRow = [
  string,
  string,
  number | null,
  number | null,
  number | null,
  number | null,
  number | null,
  Basis,
  string | null,
];

function entry(
  row: Row,
  figures: ReadonlyMap<string, RankedFigure>,
  { request, pulsed }: CheckedRequest,
): RankedEntry {
  const all = Object.fromEntries(FIGURES.map((figure) => {
    const reason = figureAbsence(figure, request.process, pulsed) ?? "not computed";
    const none = {
      mean: null,
      u: null,
      lo: null,
      hi: null,
      probability: null,
      basis: "platform" as const,
      reason,
    };
    return [figure, figures.get(figure) ?? none];
  })) as unknown as Record<Figure, RankedFigure>;
  const numbers = (text: unknown, separator: string) => (text as string).split(separator).map(Number);
  return {
    die: row.die_id as string,
    guide: row.guide_id as string,
    decision: row.decision as RankedEntry["decision"],
    probability: row.probability as number,
    limited_by: row.limited_by as string | null,
    matched: row.matched as number,
    qualifying_guides: row.qualifying_guides as number,
    guides_of_die: row.guides_of_die as number,
    ...(row.unavailable === null ? {} : { unavailable: row.unavailable as string }),
    ...(row.other_temperatures === null
      ? {}
      : { other_temperatures_c: numbers(row.other_temperatures, ", ") }),
    ...(row.window_signal === null ? {} : {
      windows_nm: { signal: numbers(row.window_signal, " to "), idler: numbers(row.window_idler, " to ") },
    }),
    ...(row.exchange_delay_ps === null ? {} : { exchange_delay_ps: row.exchange_delay_ps as number }),
    ...(row.remarks === null ? {} : { remarks: (row.remarks as string).split("\n") }),
    figures: all,
  };
}
