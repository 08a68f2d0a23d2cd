// What other stages see of the ledger: types only.
import type { RecordBatch, Schema, Table } from "apache-arrow";

/** What a run is the result of. Other words are allowed; these are the ones that views and searches know. */
export type RunKind = "ingest" | "reduce" | "predict" | (string & Record<never, never>);

/** One file that a run took in. `name` is the path relative to the run folder, with `/` on every system. */
export interface RunInput {
  readonly name: string;
  /** `lot`, `guides`, or the kind of reading (`cutback`, `tuning` …); left out when the file has none. */
  readonly kind?: string;
  /** Lower-case hex; the original is kept under this name. */
  readonly sha256: string;
  readonly bytes?: number;
  /** Data rows read; always accepted + quarantined. */
  readonly rows: number;
  readonly accepted: number;
  readonly quarantined: number;
}

/** A table of a run as its manifest states it. */
export interface RunTable {
  readonly file: string;
  readonly rows: number;
  readonly bytes: number;
  readonly sha256: string;
}

/** `manifest.json` of a run, checked. */
export interface Manifest {
  readonly format: 1;
  readonly run: string;
  readonly sequence: number;
  readonly kind: string;
  readonly lot?: string | undefined;
  /** ISO 8601, UTC. */
  readonly created: string;
  readonly program: string;
  readonly model: string;
  readonly parameters: unknown;
  /** Same fingerprint, same result: what a stage compares to find that nothing changed. */
  readonly fingerprint?: string | undefined;
  /** Names of the runs that this one was computed from. */
  readonly parents: readonly string[];
  readonly inputs: readonly RunInput[];
  readonly tables: Readonly<Record<string, RunTable>>;
}

/** The statement that goes into a manifest; the ledger adds number, name, time and table hashes. */
export interface RunStatement {
  readonly lot?: string;
  readonly inputs: readonly RunInput[];
  readonly parents: readonly string[];
  /** Anything JSON can hold. A request's name goes in as `request`: the newest run per kind, lot and request is in force. */
  readonly parameters: unknown;
  readonly modelVersion: string;
  readonly fingerprint?: string;
}

/** A table to be written: its schema (a table without rows is still a table) and its batches, pulled one at a time. */
export interface TableStream {
  readonly schema: Schema;
  readonly batches: Iterable<RecordBatch> | AsyncIterable<RecordBatch>;
}

/** The whole of a run in one call. */
export interface RunToCommit extends RunStatement {
  readonly kind: RunKind;
  readonly tables: Readonly<Record<string, TableStream>>;
  /** Originals staged before, by `Ledger.stageOriginal`. */
  readonly originals?: readonly StagedOriginal[];
}

/** A copy of a file, hashed on the way and not yet part of the ledger. */
export interface StagedOriginal {
  readonly sha256: string;
  readonly bytes: number;
  /** The copy: what is parsed is what is kept, whatever happens to the file it came from. */
  readonly path: string;
}

/** One table of a run being written. Batches go to disk as they come; memory stays bounded. */
export interface TableWriter {
  readonly rows: number;
  /** Resolves when the writer can take the next batch: wait for it. */
  write(batch: RecordBatch): Promise<void>;
}

/** A run being written. Nothing of it is visible until `commit` resolves. */
export interface PendingRun {
  /** Copies a file (or bytes) beside the ledger and hashes it on the way. */
  stageOriginal(source: string | ReadableStream<Uint8Array> | Uint8Array): Promise<StagedOriginal>;
  /** Opens a table, or hands back the one opened under this name. */
  table(name: string, schema: Schema): TableWriter;
  /** Closes the tables, writes the manifest, flushes, puts the originals and then the run in place. */
  commit(statement: RunStatement): Promise<Manifest>;
  /** Leaves nothing behind; after `commit` it does nothing. */
  discard(): Promise<void>;
}

/** A file in force: its newest version, and the run that holds its rows. */
export interface ActiveFile {
  readonly lot: string;
  readonly name: string;
  readonly kind: string;
  readonly sha256: string;
  /** Name of the run. */
  readonly run: string;
}

/** Rows of one run that are in force. */
export interface ActiveRows {
  readonly run: Manifest;
  readonly table: Table;
}

export interface ReadOptions {
  readonly columns?: readonly string[];
  readonly rowGroups?: readonly number[];
}

/** What `findRun` looks for. */
export interface RunKey {
  readonly kind: RunKind;
  readonly lot?: string;
  /** `parameters.request` of the run. */
  readonly request?: string;
  readonly fingerprint: string;
}

export interface Ledger {
  readonly directory: string;
  readonly writable: boolean;
  /** Every run, oldest first. @throws LedgerError naming a manifest that does not hold */
  runs(): Promise<readonly Manifest[]>;
  /** Starts a run; only on a ledger opened for writing. */
  begin(kind: RunKind): Promise<PendingRun>;
  /** Copies a file beside the ledger for a later `commit`; without one it is cleaned away. */
  stageOriginal(source: string | ReadableStream<Uint8Array> | Uint8Array): Promise<StagedOriginal>;
  /** Writes a whole run. */
  commit(run: RunToCommit): Promise<Manifest>;
  /** Files in force, of one lot or of all: the newest ingest run that holds lot + name wins. */
  activeFiles(lot?: string): Promise<readonly ActiveFile[]>;
  /** The run in force for kind, lot and request, if it was made from the same: then there is nothing to compute. */
  findRun(key: RunKey): Promise<Manifest | null>;
  /** Runs in force of a kind: all of `ingest` (files decide), else the newest per lot and request. */
  runsInForce(kind: RunKind): Promise<readonly Manifest[]>;
  readTable(run: string | Manifest, table: string, options?: ReadOptions): Promise<Table>;
  /** Columns of a table. */
  tableSchema(run: string | Manifest, table: string): Promise<Schema>;
  /** Batches of a table, row group by row group. */
  streamTable(run: string | Manifest, table: string, options?: ReadOptions): AsyncIterable<RecordBatch>;
  /** Batches of an ingest run's table, only the rows that are in force. */
  streamInForce(run: string | Manifest, table: string, options?: ReadOptions): AsyncIterable<RecordBatch>;
  /** Rows in force of one table over the ingest runs of a lot (or of all), per run that still counts, oldest first. */
  readActive(table: string, lot?: string, options?: ReadOptions): Promise<readonly ActiveRows[]>;
  /** The same rows batch by batch: memory holds one row group at a time. */
  streamActive(table: string, lot?: string, options?: ReadOptions): AsyncIterable<RecordBatch>;
  /** Path of a kept original. */
  originalPath(sha256: string): string;
  /** Releases the lock, and cleans away what was staged and never committed. */
  close(): Promise<void>;
  [Symbol.asyncDispose](): Promise<void>;
}

// Columns that every table of an ingest run has, so that the rows in force can be told and traced:
//   source_file  text  sha256 of the file
//   source_line  i32   line in the file, the heading is line 1 (1 for rows out of a JSON file)
//   file_name    text  the file's `name` among the run's inputs; two files may have the same content
