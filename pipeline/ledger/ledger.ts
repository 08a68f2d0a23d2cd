import { resolve } from "node:path";
import { type RecordBatch, type Schema, Table } from "apache-arrow";
import config from "../../deno.json" with { type: "json" };
import { LedgerError } from "../../shared/errors.ts";
import { activeFilesOf, filterBatch, requestOf, rowFilterOf, runsInForceOf } from "./active.ts";
import { selectColumns } from "./columns.ts";
import { makeLedger, requireLedger, unmakeLedger } from "./directory.ts";
import { type Layout, layoutOf } from "./layout.ts";
import { clearLeftovers } from "./leftovers.ts";
import { type Lock, takeLock } from "./lock.ts";
import { stageOriginal } from "./originals.ts";
import { type CommitStage, startRun } from "./pending_run.ts";
import { refuseUnknownColumns } from "./parquet_read.ts";
import { readRuns } from "./runs.ts";
import { TableStore } from "./table_store.ts";
import type {
  ActiveRows,
  Ledger,
  Manifest,
  PendingRun,
  ReadOptions,
  RunKey,
  RunToCommit,
  StagedOriginal,
} from "./types.ts";

export interface OpenOptions {
  /** Take the one writer's lock, and make the ledger if there is none. */
  readonly write: boolean;
  /** Reading only: as the ledger stood when the run of this number was the newest. */
  readonly upTo?: number;
  readonly now?: () => Date;
  /** Called at each point of a commit. */
  readonly onStage?: (stage: CommitStage) => void | Promise<void>;
}

/**
 * Opens the ledger in a folder; close it after use (`await using`).
 * @throws InputError for a place that holds no ledger and can't, LedgerError for one that is damaged or locked
 */
export async function openLedger(directory: string, options: OpenOptions): Promise<Ledger> {
  const layout = layoutOf(resolve(directory));
  if (options.write && options.upTo !== undefined) {
    throw new TypeError("Cannot write to a ledger as it stood before");
  }
  if (!options.write) {
    await requireLedger(layout);
    return new OpenLedger(layout, null, options);
  }
  const { madeRoot } = await makeLedger(layout);
  const lock = await takeLock(layout.root, (options.now ?? systemClock)());
  const ledger = new OpenLedger(layout, { lock, madeRoot }, options);
  try {
    await clearLeftovers(layout, await ledger.runs());
  } catch (error) {
    await lock.release({ removeFile: false });
    throw error;
  }
  return ledger;
}

const systemClock = () => new Date();

class OpenLedger implements Ledger {
  #runs: Promise<readonly Manifest[]> | null = null;
  readonly #tables: TableStore;
  readonly #pending = new Set<PendingRun>();

  constructor(
    readonly layout: Layout,
    readonly writing: { lock: Lock; madeRoot: boolean } | null,
    readonly options: OpenOptions,
  ) {
    this.#tables = new TableStore(layout);
  }

  get directory(): string {
    return this.layout.root;
  }
  get writable(): boolean {
    return this.writing !== null;
  }

  runs(): Promise<readonly Manifest[]> {
    const { upTo = Infinity } = this.options;
    return this.#runs ??= readRuns(this.layout).then((runs) => runs.filter((run) => run.sequence <= upTo));
  }

  async begin(kind: string): Promise<PendingRun> {
    return await this.#begin(kind, []);
  }

  stageOriginal(source: string | ReadableStream<Uint8Array> | Uint8Array): Promise<StagedOriginal> {
    this.#requireWriting();
    return stageOriginal(this.layout, source);
  }

  async commit({ kind, tables, originals, ...statement }: RunToCommit): Promise<Manifest> {
    const run = await this.#begin(kind, originals ?? []);
    try {
      for (const [name, { schema, batches }] of Object.entries(tables)) {
        const writer = run.table(name, schema);
        for await (const batch of batches) await writer.write(batch);
      }
    } catch (error) {
      await run.discard();
      throw error;
    }
    return await run.commit(statement);
  }

  async activeFiles(lot?: string) {
    return activeFilesOf(await this.runs(), lot);
  }

  async runsInForce(kind: string) {
    return runsInForceOf(await this.runs(), kind);
  }

  async findRun(key: RunKey): Promise<Manifest | null> {
    const found = (await this.runsInForce(key.kind)).findLast((run) =>
      run.lot === key.lot && (key.kind === "ingest" || requestOf(run) === (key.request ?? null))
    );
    return found?.fingerprint === key.fingerprint ? found : null;
  }

  async readTable(run: string | Manifest, table: string, options?: ReadOptions): Promise<Table> {
    using file = await this.#tables.open(await this.#manifest(run), table);
    return await file.read(options);
  }

  async tableSchema(run: string | Manifest, table: string): Promise<Schema> {
    using file = await this.#tables.openUnverified(await this.#manifest(run), table);
    return file.schema;
  }

  async *streamTable(
    run: string | Manifest,
    table: string,
    options?: ReadOptions,
  ): AsyncGenerator<RecordBatch> {
    using file = await this.#tables.open(await this.#manifest(run), table);
    yield* file.stream(options);
  }

  async *streamInForce(
    run: string | Manifest,
    table: string,
    options: ReadOptions = {},
  ): AsyncGenerator<RecordBatch> {
    const manifest = await this.#manifest(run);
    using file = await this.#tables.open(manifest, table);
    const all = file.schema.fields.map((field) => String(field.name));
    refuseUnknownColumns(file.schema, options.columns, `${table} of ${manifest.run}`);
    const filter = rowFilterOf(manifest, await this.activeFiles(manifest.lot), all);
    if (filter.none) return;
    const wanted = all.filter((name) => options.columns?.includes(name) ?? true);
    // The column that the filter looks at is read as well, and left out again.
    const columns = filter.all
      ? wanted
      : all.filter((name) => wanted.includes(name) || name === filter.column);
    for await (const batch of file.stream({ ...options, columns })) {
      for (const slice of filterBatch(batch, filter)) yield selectColumns(slice, wanted);
    }
  }

  async readActive(table: string, lot?: string, options: ReadOptions = {}): Promise<readonly ActiveRows[]> {
    const rows: ActiveRows[] = [];
    for (const run of await this.#runsWithRows(table, lot)) {
      const batches: RecordBatch[] = [];
      for await (const batch of this.streamInForce(run, table, options)) batches.push(batch);
      const schema = await this.tableSchema(run, table);
      rows.push({ run, table: new Table(schema.select([...options.columns ?? schema.names]), batches) });
    }
    return rows;
  }

  async *streamActive(table: string, lot?: string, options: ReadOptions = {}): AsyncGenerator<RecordBatch> {
    for (const run of await this.#runsWithRows(table, lot)) yield* this.streamInForce(run, table, options);
  }

  async #runsWithRows(table: string, lot?: string): Promise<Manifest[]> {
    const active = new Set((await this.activeFiles(lot)).map((file) => file.run));
    return (await this.runsInForce("ingest")).filter((run) =>
      active.has(run.run) && run.tables[table] !== undefined
    );
  }

  originalPath(sha256: string): string {
    return `${this.layout.originals}/${sha256}`;
  }

  async close(): Promise<void> {
    if (this.writing === null) return;
    for (const run of this.#pending) await run.discard();
    const runs = await this.runs();
    await clearLeftovers(this.layout, runs);
    if (runs.length === 0) await unmakeLedger(this.layout, false);
    await this.writing.lock.release({ removeFile: runs.length === 0 });
    if (runs.length === 0 && this.writing.madeRoot) await Deno.remove(this.layout.root).catch(() => {});
  }

  [Symbol.asyncDispose](): Promise<void> {
    return this.close();
  }

  async #begin(kind: string, staged: readonly StagedOriginal[]): Promise<PendingRun> {
    this.#requireWriting();
    const run = await startRun(this.layout, {
      kind,
      program: `${config.name} ${config.version}`,
      now: this.options.now ?? systemClock,
      nextSequence: async () => ((await this.runs()).at(-1)?.sequence ?? 0) + 1,
      staged,
      onStage: this.options.onStage ?? (() => {}),
      onCommitted: (manifest) => {
        const before = this.runs();
        this.#runs = before.then((runs) => [...runs, manifest]);
      },
    });
    this.#pending.add(run);
    return run;
  }

  #requireWriting(): void {
    if (this.writing === null) throw new TypeError("Cannot write: the ledger was opened for reading");
  }

  async #manifest(run: string | Manifest): Promise<Manifest> {
    if (typeof run !== "string") return run;
    const found = (await this.runs()).find((manifest) => manifest.run === run);
    if (found === undefined) {
      throw new LedgerError(`Cannot find run ${run} in the ledger ${this.layout.root}`);
    }
    return found;
  }
}
