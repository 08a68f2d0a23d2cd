import type { RecordBatch, Schema } from "apache-arrow";
import { type Ledger, type Manifest, requestOf } from "../ledger/mod.ts";
import { BASE_TABLES, baseSchema } from "./base_tables.ts";
import { type Engine, quoteName } from "./engine.ts";
import { OVERVIEW_TABLES, overviewTable } from "./overview_tables.ts";

/** Schema of the engine in which the ledger's tables stand as they were written; the views stand in `main`. */
export const LEDGER_SCHEMA = "ledger";
/** Schema of the tables of single runs, of which those of `ledger` are made. */
const PARTS_SCHEMA = "parts";

export interface LoadOptions {
  /** Only these lots; all of them without it. */
  readonly lots?: readonly string[];
  /** Columns only: for statements that ask for no row. */
  readonly withoutRows?: boolean;
}

/** Which columns to load, by lower-case name; null for all. */
export type ColumnNames = ReadonlySet<string> | null;

interface Part {
  readonly run: Manifest | null;
  readonly schema: Schema;
  readonly batches: Iterable<RecordBatch> | AsyncIterable<RecordBatch>;
}

/** Makes the engine ready for `loadLedgerTable`. */
export function createSchemas(engine: Engine): void {
  engine.run(`CREATE SCHEMA ${LEDGER_SCHEMA}`);
  engine.run(`CREATE SCHEMA ${PARTS_SCHEMA}`);
}

/** Names of all tables that a query of this ledger can use. */
export async function ledgerTableNames(ledger: Ledger): Promise<string[]> {
  const held = (await ledger.runs()).flatMap((run) => Object.keys(run.tables));
  return [...new Set([...BASE_TABLES, ...OVERVIEW_TABLES, ...held])];
}

/**
 * Loads a table's rows in force into the engine as `ledger.<name>`: from ingest runs the rows of files in force, from
 * others those of the newest run per lot and request. Runs are joined by column name; `lot`, `run` and `request` say
 * where a row is from, unless the table says so itself.
 */
export async function loadLedgerTable(
  engine: Engine,
  ledger: Ledger,
  name: string,
  options: LoadOptions = {},
  columnNames: ColumnNames = null,
): Promise<void> {
  const selects: string[] = [];
  for await (const { run, schema, batches } of partsOf(ledger, name, options, columnNames)) {
    const part = { schema: PARTS_SCHEMA, table: `${name} ${run?.run ?? ""}` };
    engine.createTable(part, schema);
    if (options.withoutRows !== true) { for await (const batch of batches) engine.insert(part, [batch]); }
    const columns = ["*", ...originColumns(name, schema, run)].join(", ");
    selects.push(`SELECT ${columns} FROM ${PARTS_SCHEMA}.${quoteName(part.table)}`);
  }
  engine.run(`CREATE VIEW ${LEDGER_SCHEMA}.${quoteName(name)} AS ${selects.join(" UNION ALL BY NAME ")}`);
}

async function* partsOf(
  ledger: Ledger,
  name: string,
  options: LoadOptions,
  columnNames: ColumnNames,
): AsyncGenerator<Part> {
  const overview = await overviewTable(ledger, name);
  if (overview !== null) {
    yield {
      run: null,
      schema: overview.schema,
      batches: options.withoutRows === true ? [] : overview.batches,
    };
    return;
  }
  let found = false;
  for await (const part of heldParts(ledger, name, options, columnNames)) {
    found = true;
    yield part;
  }
  if (!found) yield { run: null, schema: await knownSchema(ledger, name), batches: [] };
}

async function* heldParts(
  ledger: Ledger,
  name: string,
  options: LoadOptions,
  columnNames: ColumnNames,
): AsyncGenerator<Part> {
  const active = new Set((await ledger.activeFiles()).map((file) => file.run));
  const ingested = (await ledger.runsInForce("ingest")).filter((run) => active.has(run.run));
  const computed = await computedRunsInForce(ledger);
  const held = (run: Manifest) =>
    run.tables[name] !== undefined && (options.lots === undefined || options.lots.includes(run.lot ?? ""));
  for (const run of [...ingested, ...computed].filter(held)) {
    const all = await ledger.tableSchema(run, name);
    const columns = selected(all, columnNames);
    const schema = all.select(columns);
    if (options.withoutRows === true) yield { run, schema, batches: [] };
    else if (run.kind === "ingest") {
      yield { run, schema, batches: ledger.streamInForce(run, name, { columns }) };
    } else yield { run, schema, batches: ledger.streamTable(run, name, { columns }) };
  }
}

/** Columns of a table that are asked for; at least one, or the rows could not be counted. */
function selected(schema: Schema, columnNames: ColumnNames): string[] {
  const all = schema.fields.map((field) => String(field.name));
  const named = columnNames === null ? all : all.filter((name) => columnNames.has(name.toLowerCase()));
  return named.length > 0 ? named : all.slice(0, 1);
}

/** Runs in force of every kind but ingest. */
async function computedRunsInForce(ledger: Ledger): Promise<Manifest[]> {
  const kinds = new Set((await ledger.runs()).map((run) => run.kind));
  kinds.delete("ingest");
  const runs = await Promise.all([...kinds].map((kind) => ledger.runsInForce(kind)));
  return runs.flat().sort((a, b) => a.sequence - b.sequence);
}

/** Columns of a table without any row in force: as declared, or as some run (of another lot, or superseded) has them. */
async function knownSchema(ledger: Ledger, name: string): Promise<Schema> {
  const declared = baseSchema(name);
  if (declared !== null) return declared;
  const run = (await ledger.runs()).findLast((candidate) => candidate.tables[name] !== undefined);
  if (run === undefined) throw new RangeError(`Cannot load table "${name}": no run holds it`);
  return await ledger.tableSchema(run, name);
}

function originColumns(name: string, schema: Schema, run: Manifest | null): string[] {
  if (OVERVIEW_TABLES.includes(name)) return [];
  const has = new Set(schema.fields.map((field) => field.name));
  const origin = {
    lot: run?.lot,
    run: run?.run,
    ...(run?.kind === "ingest" ? {} : { request: run && requestOf(run) }),
  };
  return Object.entries(origin).filter(([column]) => !has.has(column)).map(([column, value]) =>
    `CAST(${value === undefined || value === null ? "NULL" : quoteText(value)} AS VARCHAR) AS ${column}`
  );
}

const quoteText = (text: string) => `'${text.replaceAll("'", "''")}'`;
