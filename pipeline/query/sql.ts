import { InputError } from "../../shared/errors.ts";
import { didYouMean, nearestWord } from "../../shared/schemas/nearest.ts";
import type { Ledger } from "../ledger/mod.ts";
import { columnsInSql } from "./columns_in_sql.ts";
import { type Engine, type QueryResult, quoteName, startEngine } from "./engine.ts";
import {
  type ColumnNames,
  createSchemas,
  LEDGER_SCHEMA,
  ledgerTableNames,
  loadLedgerTable,
  type LoadOptions,
} from "./ledger_tables.ts";
import { firstWord, namesInSql, refusalOf, sqlTokens, type Token } from "./sql_text.ts";
import { readViews } from "./views.ts";

/**
 * Runs one reading statement over the ledger's tables and views, loading only those that it names.
 * @throws InputError for a statement that isn't one, writes, or fails
 */
export async function runSql(ledger: Ledger, text: string, options: LoadOptions = {}): Promise<QueryResult> {
  const tokens = sqlTokens(text);
  const refusal = refusalOf(tokens);
  if (refusal !== null) throw new InputError(`Cannot run the query: ${refusal}`, { value: text });
  const names = await tableNames(ledger);
  using engine = await startEngine();
  const failed = (error: unknown, why: string) =>
    new InputError(`Cannot run the query: ${why}`, { value: text }, { cause: error });
  try {
    await loadNamed(engine, ledger, tokens, options);
  } catch (error) {
    throw isOutOfMemory(error) ? failed(error, tooLarge(error)) : error;
  }
  try {
    const result = engine.query(text);
    return firstWord(tokens) === "explain" ? planLines(result) : result;
  } catch (error) {
    throw failed(error, isOutOfMemory(error) ? tooLarge(error) : explained(error, names));
  }
}

const isOutOfMemory = (error: unknown): error is Error =>
  error instanceof WebAssembly.RuntimeError ||
  (error instanceof Error && /out of memory|bad_alloc/i.test(error.message));

const tooLarge = (error: Error): string =>
  `what it names does not fit the engine's 4 GB (${error.message}); name fewer columns, or fewer lots`;

/** Names that a query can use, in text order. */
export async function tableNames(ledger: Ledger): Promise<string[]> {
  const tables = await ledgerTableNames(ledger);
  return [...new Set([...tables, ...(await readViews(new Set(tables))).keys()])].sort();
}

/** Starts an engine that holds some tables and views of the ledger, for several queries. Dispose of it after use. */
export async function engineWith(
  ledger: Ledger,
  names: readonly string[],
  options: LoadOptions = {},
): Promise<Engine> {
  const engine = await startEngine();
  try {
    await loadViews(engine, ledger, new Set(names), options);
    return engine;
  } catch (error) {
    engine[Symbol.dispose]();
    throw error;
  }
}

async function loadNamed(engine: Engine, ledger: Ledger, tokens: readonly Token[], options: LoadOptions) {
  switch (firstWord(tokens)) {
    case "show": // names every table, asks for no row
      return await loadViews(engine, ledger, new Set(await tableNames(ledger)), {
        ...options,
        withoutRows: true,
      });
    case "describe":
    case "desc":
      return await loadViews(engine, ledger, namesInSql(tokens), { ...options, withoutRows: true });
    default:
      return await loadViews(
        engine,
        ledger,
        namesInSql(tokens),
        options,
        columnsInSql(tokens, new Set(await tableNames(ledger))),
      );
  }
}

/** Loads the tables and views among `wanted`, and what the views are made of. */
async function loadViews(
  engine: Engine,
  ledger: Ledger,
  wanted: ReadonlySet<string>,
  options: LoadOptions,
  columns: ColumnNames = null,
) {
  createSchemas(engine);
  const tables = new Set(await ledgerTableNames(ledger));
  const views = viewsFor(wanted, tables, await readViews(tables));
  let named: Set<string> | null = columns === null ? null : new Set(columns);
  const used = new Set<string>();
  for (const { sql } of views) {
    const tokens = sqlTokens(sql);
    namesInSql(tokens).forEach((name) => tables.has(name) && used.add(name));
    const inView = sql.startsWith(PLAIN_VIEW) ? new Set<string>() : columnsInSql(tokens, new Set());
    named = named === null || inView === null ? null : new Set([...named, ...inView]);
  }
  for (const name of used) await loadLedgerTable(engine, ledger, name, options, named);
  for (const { name, sql } of views) engine.run(`CREATE VIEW ${quoteName(name)} AS ${sql}`);
}

const PLAIN_VIEW = `SELECT * FROM ${LEDGER_SCHEMA}.`;

/** The views to make, each after those it is made of; a table without a view of its name gets a plain one. */
function viewsFor(
  wanted: ReadonlySet<string>,
  tables: ReadonlySet<string>,
  files: ReadonlyMap<string, string>,
): { name: string; sql: string }[] {
  const made = new Map<string, string>();
  const visit = (name: string, within: readonly string[]) => {
    // A view may have the name of the table it is made of.
    if (made.has(name) || within.includes(name) || !(tables.has(name) || files.has(name))) return;
    const sql = files.get(name) ?? PLAIN_VIEW + quoteName(name);
    for (const used of namesInSql(sqlTokens(sql))) visit(used, [...within, name]);
    made.set(name, sql);
  };
  for (const name of wanted) visit(name, []);
  return [...made].map(([name, sql]) => ({ name, sql }));
}

/** A plan is a drawing in one cell: one row per line prints as it was drawn. */
function planLines({ rows }: QueryResult): QueryResult {
  const lines = rows.flatMap((row) => String(row.at(-1)).trimEnd().split("\n"));
  return { columns: [{ name: "plan", type: "Utf8" }], rows: lines.map((line) => [line]) };
}

/** The engine's own words, with the nearest of all tables where it knows only the loaded ones. */
function explained(error: unknown, names: readonly string[]): string {
  const message = error instanceof Error ? error.message.trim() : String(error);
  const unknown = /Table with name (\S+) does not exist/.exec(message)?.[1];
  if (unknown === undefined) return message;
  return `found no table ${JSON.stringify(unknown)}${didYouMean(nearestWord(unknown, names))}; tables: ${
    names.join(", ")
  }`;
}
