import type { Expectation } from "../../fixtures/demo_lots.ts";
import type { Ledger } from "../ledger/mod.ts";
import { runSql } from "../query/sql.ts";
import type { ReadingRef } from "../traits/trait_row.ts";

type Contradicted = Extract<Expectation, { kind: "contradicted" }>;

/** A reading that the predictions in force name as contradicting the others of its trait. */
interface Named {
  readonly request: string;
  readonly trait: string;
  readonly unit: string;
  readonly polarisation: string | null;
  /** Lines of its files, as `readings/fringes.csv:12`. */
  readonly lines: readonly string[];
}

/**
 * What is not so of a planted contradictory reading: it has to be named, it alone of its lot, by file and line, for every
 * request that rests on its trait; and it has to be in use all the same.
 */
export async function missedContradiction(ledger: Ledger, lot: string, e: Contradicted): Promise<string[]> {
  const at = `${e.file}:${e.line}`;
  const named = await namedReadings(ledger, lot);
  const missed: string[] = [];
  for (const request of e.requests) {
    const own = named.filter((n) => n.request === request);
    const found = own.some((n) => n.trait === e.trait && n.unit === e.unit && n.lines.join() === at);
    if (!found) missed.push(`${at} of ${e.unit} is named as contradicting its neighbours for ${request}`);
  }
  const others = new Set(
    named.filter((n) => n.lines.join() !== at).map((n) => `${n.unit} (${n.lines.join()})`),
  );
  for (const other of others) missed.push(`nothing but ${at} contradicts the rest; ${other} is named, too`);
  for (const { request, trait, polarisation } of named.filter((n) => n.lines.join() === at)) {
    const { rows } = await runSql(
      ledger,
      `SELECT coalesce(max(share_own), 0) FROM used_traits WHERE lot = ${text(lot)} AND request = ${
        text(request)
      } AND guide_id = ${text(e.unit)} AND trait = ${text(trait)} AND polarisation = ${
        text(polarisation ?? "")
      }`,
    );
    if (!(Number(rows[0]![0]) > 0)) missed.push(`${at} is in use for ${request}`);
  }
  return missed;
}

/** Readings named in a lot in which none was planted, as sentences. */
export async function falseContradictions(ledger: Ledger, lot: string): Promise<string[]> {
  const named = await namedReadings(ledger, lot);
  return named.map((n) => `${n.lines.join()} of ${n.unit} is named as contradicting its neighbours`);
}

async function namedReadings(ledger: Ledger, lot: string): Promise<Named[]> {
  const { rows } = await runSql(
    ledger,
    `SELECT request, trait, unit, polarisation, readings FROM contradictions WHERE lot = ${text(lot)}`,
  );
  return rows.map(([request, trait, unit, polarisation, readings]) => ({
    request: String(request),
    trait: String(trait),
    unit: String(unit),
    polarisation: polarisation === null ? null : String(polarisation),
    lines: (JSON.parse(String(readings)) as ReadingRef[]).flatMap(({ file_name, lines }) =>
      lines.map(([first, last]) => `${file_name}:${first === last ? first : `${first}-${last}`}`)
    ),
  }));
}

const text = (value: string): string => `'${value.replaceAll("'", "''")}'`;
