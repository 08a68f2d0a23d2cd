import { type RecordBatch, type Schema, Table, tableFromIPC } from "apache-arrow";
import { ParquetFile, type Table as WasmTable } from "parquet-wasm";
import { LedgerError } from "../../shared/errors.ts";
import type { ReadOptions } from "./types.ts";

/** Rows in one batch: the reader's default of 1,024 costs more in overhead than in decoding. */
const BATCH_ROWS = 65_536;

/** An open Parquet file of the ledger. */
export interface TableFile extends Disposable {
  readonly rowGroups: number;
  readonly rows: number;
  readonly schema: Schema;
  read(options?: ReadOptions): Promise<Table>;
  /** Row group by row group: memory holds one at a time. */
  stream(options?: ReadOptions): AsyncIterable<RecordBatch>;
}

/** Opens a Parquet file; only the parts that are asked for are read. @throws LedgerError naming the file */
export async function openTableFile(path: string): Promise<TableFile> {
  const file = await Deno.open(path, { read: true }).catch((error) => {
    throw new LedgerError(`Cannot read ${path}: ${error.message}`, { file: path }, { cause: error });
  });
  try {
    const { size } = await file.stat();
    const parquet = await decoding(path, () => ParquetFile.fromFile(new FilePart(file, 0, size)));
    const metadata = parquet.metadata();
    const rowGroups = metadata.numRowGroups();
    const rows = metadata.fileMetadata().numRows();
    const schema = tableFromIPC(parquet.schema().intoIPCStream()).schema;
    const readGroups = async (groups: readonly number[], columns?: readonly string[]) => {
      refuseUnknownColumns(schema, columns, path);
      refuseUnknownGroups(path, rowGroups, groups);
      const options = {
        batchSize: BATCH_ROWS,
        rowGroups: [...groups],
        ...(columns === undefined ? {} : { columns: [...columns] }),
      };
      return toArrow(await decoding(path, () => parquet.read(options)));
    };
    const allGroups = Array.from({ length: rowGroups }, (_, i) => i);
    const stream = async function* (options: ReadOptions = {}) {
      for (const group of options.rowGroups ?? allGroups) {
        yield* (await readGroups([group], options.columns)).batches;
      }
    };
    return {
      rowGroups,
      rows,
      schema,
      stream,
      async read(options = {}) {
        // One group at a time even so: the decoder's memory never shrinks again.
        const batches: RecordBatch[] = [];
        for await (const batch of stream(options)) batches.push(batch);
        return batches.length > 0 ? new Table(batches) : await readGroups([], options.columns);
      },
      [Symbol.dispose]() {
        parquet.free();
        file.close();
      },
    };
  } catch (error) {
    file.close();
    throw error;
  }
}

/** What the decoder says when a file is no whole Parquet file becomes an error that names the file. */
async function decoding<T>(path: string, step: () => Promise<T>): Promise<T> {
  try {
    return await step();
  } catch (error) {
    const why = error instanceof Error ? error.message : String(error);
    throw new LedgerError(`Cannot read ${path}: it is no whole Parquet file (${why})`, { file: path }, {
      cause: error,
    });
  }
}

function toArrow(table: WasmTable): Table {
  return tableFromIPC(table.intoIPCStream()); // takes the table's memory back
}

/** @throws RangeError for a column that the schema has not */
export function refuseUnknownColumns(
  schema: Schema,
  columns: readonly string[] | undefined,
  where: string,
): void {
  const known = schema.fields.map((field) => String(field.name));
  const unknown = columns?.find((name) => !known.includes(name));
  if (unknown === undefined) return;
  throw new RangeError(`Cannot read column "${unknown}" of ${where}: found columns ${known.join(", ")}`);
}

function refuseUnknownGroups(path: string, rowGroups: number, groups: readonly number[]): void {
  const beyond = groups.find((group) => !Number.isSafeInteger(group) || group < 0 || group >= rowGroups);
  if (beyond === undefined) return;
  throw new RangeError(`Cannot read row group ${beyond} of ${path}: found ${rowGroups} of them, from 0`);
}

/** A stretch of an open file in the shape of a Blob, which is what the decoder reads from: it asks for the parts it needs. */
class FilePart extends Blob {
  constructor(readonly file: Deno.FsFile, readonly from: number, readonly to: number) {
    super();
  }
  override get size(): number {
    return this.to - this.from;
  }
  override slice(start = 0, end = this.size): Blob {
    return new FilePart(this.file, this.from + start, Math.min(this.from + end, this.to));
  }
  override arrayBuffer(): Promise<ArrayBuffer> {
    const bytes = new Uint8Array(this.size);
    // Seek and read without a pause between: two parts share one file position.
    this.file.seekSync(this.from, Deno.SeekMode.Start);
    for (let done = 0; done < bytes.length;) {
      const n = this.file.readSync(bytes.subarray(done));
      if (n === null) return Promise.reject(new Error(`the file ends at ${this.from + done} bytes`));
      done += n;
    }
    return Promise.resolve(bytes.buffer);
  }
}
