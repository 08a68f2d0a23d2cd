import {
  columnsToBatches,
  type Ledger,
  requestOf,
  tableSchema,
  type TableShape,
  type TableStream,
} from "../ledger/mod.ts";
import type { RecordBatch } from "apache-arrow";

/** Tables made of the manifests themselves. */
export const OVERVIEW_TABLES: readonly string[] = ["runs", "files"];

const RUNS = {
  run: "text",
  sequence: "i32",
  kind: "text",
  lot: "text",
  request: "text",
  created: "text",
  program: "text",
  model: "text",
  parents: "text",
  files: "i32",
  rows: "i32",
  in_force: "bool",
} as const satisfies TableShape;

const FILES = {
  lot: "text",
  name: "text",
  kind: "text",
  sha256: "text",
  run: "text",
  rows: "i32",
  accepted: "i32",
  quarantined: "i32",
  in_force: "bool",
} as const satisfies TableShape;

/** `runs` (every run; `in_force` tells those that count) or `files` (every version of every file), or null. */
export async function overviewTable(
  ledger: Ledger,
  name: string,
): Promise<TableStream & { readonly batches: Iterable<RecordBatch> } | null> {
  if (name === "runs") {
    return {
      schema: tableSchema(RUNS),
      batches: columnsToBatches(RUNS, transposed(RUNS, await runRows(ledger))),
    };
  }
  if (name === "files") {
    return {
      schema: tableSchema(FILES),
      batches: columnsToBatches(FILES, transposed(FILES, await fileRows(ledger))),
    };
  }
  return null;
}

async function runRows(ledger: Ledger) {
  const runs = await ledger.runs();
  const active = new Set((await ledger.activeFiles()).map((file) => file.run));
  const kinds = [...new Set(runs.map((run) => run.kind))].filter((kind) => kind !== "ingest");
  for (const kind of kinds) for (const run of await ledger.runsInForce(kind)) active.add(run.run);
  return runs.map((run) => ({
    run: run.run,
    sequence: run.sequence,
    kind: run.kind,
    lot: run.lot ?? null,
    request: requestOf(run),
    created: run.created,
    program: run.program,
    model: run.model,
    parents: run.parents.join(", "),
    files: run.inputs.length,
    rows: Object.values(run.tables).reduce((sum, table) => sum + table.rows, 0),
    in_force: active.has(run.run),
  }));
}

async function fileRows(ledger: Ledger) {
  const active = new Set((await ledger.activeFiles()).map((file) => JSON.stringify([file.run, file.name])));
  return (await ledger.runs()).filter((run) => run.kind === "ingest").flatMap((run) =>
    run.inputs.map((input) => ({
      lot: run.lot ?? null,
      name: input.name,
      kind: input.kind ?? null,
      sha256: input.sha256,
      run: run.run,
      rows: input.rows,
      accepted: input.accepted,
      quarantined: input.quarantined,
      in_force: active.has(JSON.stringify([run.run, input.name])),
    }))
  );
}

type Cell<T> = T extends "text" ? string | null : T extends "bool" ? boolean : number;
type Row<S extends TableShape> = { readonly [K in keyof S]: Cell<S[K]> };

/** Rows as objects → columns. */
function transposed<S extends TableShape>(shape: S, rows: readonly Row<S>[]) {
  const columns = Object.keys(shape).map((name) => [name, rows.map((row) => row[name])]);
  return Object.fromEntries(columns) as { [K in keyof S]: Cell<S[K]>[] };
}
