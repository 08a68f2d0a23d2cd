import { createHash } from "node:crypto";
import {
  type Data,
  DataType,
  makeData,
  RecordBatch,
  type Schema,
  Struct,
  Table,
  tableToIPC,
} from "apache-arrow";
import {
  Compression,
  Table as WasmTable,
  transformParquetStream,
  WriterPropertiesBuilder,
} from "parquet-wasm";
import { writeAll } from "./disk.ts";
import type { RunTable, TableWriter } from "./types.ts";

// A row group is the least that a reader takes at once, and it is held four times over on its way (file, decoder, Arrow
// stream, JavaScript): small enough for bounded memory (lists of walls make a row of 80 kB), large enough that a table of
// plain columns decodes in few calls.
const MAX_GROUP_BYTES = 8e6;
const MAX_GROUP_ROWS = 262_144;

/** A Parquet file being written and hashed, batch by batch. */
export interface TableFileWriter extends TableWriter {
  /** Writes the footer, flushes, closes. */
  finish(): Promise<Omit<RunTable, "file">>;
  /** Closes an unfinished file and lets its memory go. */
  abort(): Promise<void>;
}

/** Opens a new Parquet file: SNAPPY, no dictionaries (they decode at less than half the speed). */
export function writeTableFile(path: string, schema: Schema): TableFileWriter {
  const fieldNames = schema.fields.map((field) => field.name).join(", ");
  const queue = handOver();
  const done = drain(path, queue.stream);
  done.catch(() => {}); // seen by whoever waits next; not an unhandled rejection in between
  let rows = 0;
  return {
    get rows() {
      return rows;
    },
    async write(batch) {
      const found = batch.schema.fields.map((field) => field.name).join(", ");
      if (found !== fieldNames) {
        throw new TypeError(`Cannot write a batch to ${path}: found columns ${found}, need ${fieldNames}`);
      }
      rows += batch.numRows;
      if (batch.numRows > 0) await Promise.race([queue.push(batch), done]);
    },
    async finish() {
      if (rows === 0) await Promise.race([queue.push(emptyBatch(schema)), done]);
      queue.end();
      return { rows, ...await done };
    },
    async abort() {
      queue.end(new Error("abandoned"));
      await done.catch(() => {});
    },
  };
}

/** Turns pushed batches into a stream that is pulled; a push resolves when the stream has taken it. */
function handOver() {
  let controller!: ReadableStreamDefaultController<unknown>;
  let wanted = Promise.withResolvers<void>();
  const stream = new ReadableStream<unknown>({
    start(c) {
      controller = c;
    },
    pull() {
      wanted.resolve();
    },
  }, { highWaterMark: 0 });
  return {
    stream,
    async push(batch: RecordBatch) {
      await wanted.promise;
      wanted = Promise.withResolvers<void>();
      using table = WasmTable.fromIPCStream(tableToIPC(new Table([batch]), "stream"));
      for (const part of table.recordBatches()) controller.enqueue(part);
    },
    end(error?: Error) {
      if (error === undefined) controller.close();
      else controller.error(error);
    },
  };
}

async function drain(path: string, batches: ReadableStream<unknown>) {
  const properties = new WriterPropertiesBuilder()
    .setCompression(Compression.SNAPPY)
    .setDictionaryEnabled(false)
    .setMaxRowGroupSize(MAX_GROUP_ROWS)
    .setMaxRowGroupBytes(MAX_GROUP_BYTES)
    .build();
  using file = await Deno.open(path, { write: true, createNew: true });
  const hash = createHash("sha256");
  let bytes = 0;
  for await (const piece of await transformParquetStream(batches, properties) as ReadableStream<Uint8Array>) {
    await writeAll(file, piece);
    hash.update(piece);
    bytes += piece.length;
  }
  await file.sync();
  return { bytes, sha256: hash.digest("hex") };
}

/** A batch of no rows: from it the writer learns the columns of an empty table. */
function emptyBatch(schema: Schema): RecordBatch {
  const children = schema.fields.map((field) => emptyData(field.type));
  return new RecordBatch(
    schema,
    makeData({ type: new Struct(schema.fields), length: 0, nullCount: 0, children }),
  );
}

function emptyData(type: DataType): Data {
  if (!DataType.isList(type)) return makeData({ type });
  return makeData({
    type,
    length: 0,
    nullCount: 0,
    valueOffsets: new Int32Array(1),
    child: emptyData(type.valueType),
  });
}
