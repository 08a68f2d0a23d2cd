import { type RecordBatch, Table } from "apache-arrow";
import { LedgerError } from "../../shared/errors.ts";
import type { ActiveFile, Manifest } from "./types.ts";

/** Files in force: a file is lot + name, and the newest ingest run that holds it wins. In order of lot and name. */
export function activeFilesOf(runs: readonly Manifest[], lot?: string): ActiveFile[] {
  const newest = new Map<string, ActiveFile>();
  for (const run of runs) { // oldest first, so the last one set is the newest
    if (run.kind !== "ingest" || run.lot === undefined || (lot !== undefined && run.lot !== lot)) continue;
    for (const { name, kind = "", sha256 } of run.inputs) {
      newest.set(JSON.stringify([run.lot, name]), { lot: run.lot, name, kind, sha256, run: run.run });
    }
  }
  return [...newest.entries()].sort(([a], [b]) => a < b ? -1 : 1).map(([, file]) => file);
}

/**
 * Runs in force of one kind, oldest first: every ingest run (its files decide), every run of solved designs (no lot owns
 * them), else the newest per lot and request.
 */
export function runsInForceOf(runs: readonly Manifest[], kind: string): Manifest[] {
  const ofKind = runs.filter((run) => run.kind === kind);
  if (kind === "ingest" || kind === "design") return ofKind;
  const newest = new Map(ofKind.map((run) => [JSON.stringify([run.lot ?? null, requestOf(run)]), run]));
  return [...newest.values()].sort((a, b) => a.sequence - b.sequence);
}

/** `parameters.request` of a run, or null. */
export function requestOf(run: Manifest): string | null {
  const parameters = run.parameters as { request?: unknown } | null;
  return typeof parameters?.request === "string" ? parameters.request : null;
}

/** Which rows of a run's tables are in force, told by `file_name` (or `source_file`, where that is enough). */
export interface RowFilter {
  /** All rows count: nothing to look at. */
  readonly all: boolean;
  /** No row counts: nothing to read. */
  readonly none: boolean;
  readonly column: "file_name" | "source_file";
  readonly keep: ReadonlySet<string>;
}

/** @throws LedgerError if a table without `file_name` would need it to tell two files of the same content apart */
export function rowFilterOf(
  run: Manifest,
  active: readonly ActiveFile[],
  columns: readonly string[],
): RowFilter {
  const inForce = new Set(active.filter((file) => file.run === run.run).map((file) => file.name));
  const [kept, superseded] = [
    run.inputs.filter((input) => inForce.has(input.name)),
    run.inputs.filter((input) => !inForce.has(input.name)),
  ];
  const column = columns.includes("file_name") ? "file_name" : "source_file";
  const key = column === "file_name" ? "name" : "sha256";
  const keep = new Set(kept.map((input) => input[key]));
  const doubtful = superseded.find((input) => keep.has(input[key]));
  if (doubtful !== undefined) {
    throw new LedgerError(
      `Cannot tell which rows of ${run.run} are in force: ${doubtful.name} has the same content as another file, ` +
        `and the table has no column "file_name"`,
    );
  }
  return { all: superseded.length === 0, none: kept.length === 0, column, keep };
}

/** Rows of a batch that are in force, as slices of it (rows of one file stand together, so there are few). */
export function filterBatch(batch: RecordBatch, filter: RowFilter): RecordBatch[] {
  if (filter.all) return [batch];
  const names = batch.getChild(filter.column);
  if (names === null) throw new RangeError(`Cannot filter rows: found no column "${filter.column}"`);
  const slices: RecordBatch[] = [];
  let from = -1;
  for (let row = 0; row <= batch.numRows; row++) {
    const kept = row < batch.numRows && filter.keep.has(names.get(row) as string);
    if (kept && from < 0) from = row;
    if (!kept && from >= 0) {
      slices.push(batch.slice(from, row));
      from = -1;
    }
  }
  return slices;
}

/** Rows of a table that are in force. */
export function filterActive(table: Table, filter: RowFilter): Table {
  if (filter.all) return table;
  return new Table(table.schema, table.batches.flatMap((batch) => filterBatch(batch, filter)));
}
