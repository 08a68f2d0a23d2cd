import type { PendingRun } from "../ledger/types.ts";
import { BATCH_ROWS, TableBatches } from "./table_batches.ts";
import { TABLE_SCHEMAS } from "../ingest_tables.ts";

/** Numbers in lists that are held before a batch is written. */
const BATCH_WEIGHT = 1 << 20;

/** The tables of a run on their way to the ledger: rows gather in batches, full batches are written. */
export class RunTables {
  readonly #open = new Map<string, { batches: TableBatches; weight: number }>();

  constructor(readonly run: Pick<PendingRun, "table">) {}

  /** Adds a row; `weight` is its number of list items. */
  append(table: string, cells: readonly unknown[], weight = 0): void {
    const open = this.#table(table);
    open.batches.append(cells);
    open.weight += weight;
  }

  /** Makes sure that a table exists, with or without rows. */
  declare(table: string): void {
    this.#table(table);
  }

  /** Writes the batches that are full; to be awaited every few thousand rows. */
  async drain(): Promise<void> {
    for (const [name, open] of this.#open) {
      if (open.batches.rows >= BATCH_ROWS || open.weight >= BATCH_WEIGHT) await this.#write(name, open);
    }
  }

  /** Writes what is left. */
  async finish(): Promise<void> {
    for (const [name, open] of this.#open) {
      const writer = this.run.table(name, open.batches.schema);
      if (open.batches.rows > 0) await writer.write(open.batches.take());
    }
  }

  async #write(name: string, open: { batches: TableBatches; weight: number }): Promise<void> {
    open.weight = 0;
    await this.run.table(name, open.batches.schema).write(open.batches.take());
  }

  #table(name: string) {
    let open = this.#open.get(name);
    if (open === undefined) {
      const schema = TABLE_SCHEMAS[name];
      if (schema === undefined) throw new RangeError(`Cannot write table "${name}": no such table`);
      open = { batches: new TableBatches(schema), weight: 0 };
      this.#open.set(name, open);
    }
    return open;
  }
}
