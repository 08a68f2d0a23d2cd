import {
  Bool,
  type Data,
  type DataType,
  Field,
  Float64,
  Int32,
  List,
  makeData,
  RecordBatch,
  Schema,
  Struct,
  type Table,
  Utf8,
} from "apache-arrow";
import type { TableStream } from "./types.ts";

/**
 * Column types of the ledger's tables. Every column may have nulls, but for `bool`: apache-arrow 17 writes a batch of
 * nothing but null booleans in a form that the Parquet writer refuses.
 */
export type ColumnType = "f64" | "i32" | "text" | "bool" | "f64[]" | "i32[]";
/** Column names and types of a table, in order. */
export type TableShape = Readonly<Record<string, ColumnType>>;

interface ColumnValues {
  "f64": ArrayLike<number | null | undefined>;
  "i32": ArrayLike<number | null | undefined>;
  "text": ArrayLike<string | null | undefined>;
  "bool": ArrayLike<boolean>;
  "f64[]": ArrayLike<ArrayLike<number> | null | undefined>;
  "i32[]": ArrayLike<ArrayLike<number> | null | undefined>;
}
/** Values for each column of a shape, all of equal length. */
export type Columns<S extends TableShape> = { readonly [K in keyof S]: ColumnValues[S[K]] };

const BATCH_ROWS = 65_536;
/** Numbers in the lists of one batch: 8 MB. */
const BATCH_LIST_ITEMS = 1 << 20;

const itemField = (type: "f64[]" | "i32[]") =>
  new Field("item", type === "f64[]" ? new Float64() : new Int32(), true);

function arrowType(type: ColumnType): DataType {
  switch (type) {
    case "f64":
      return new Float64();
    case "i32":
      return new Int32();
    case "text":
      return new Utf8();
    case "bool":
      return new Bool();
    case "f64[]":
    case "i32[]":
      return new List(itemField(type));
  }
}

/** The Arrow schema of a shape. */
export function tableSchema(shape: TableShape): Schema {
  return new Schema(Object.entries(shape).map(([name, type]) => new Field(name, arrowType(type), true)));
}

/** A whole table, ready for `Ledger.commit`. */
export function tableStream<S extends TableShape>(shape: S, columns: Columns<S>): TableStream {
  return { schema: tableSchema(shape), batches: columnsToBatches(shape, columns) };
}

/**
 * Cuts plain columns into batches of a table. Missing is null: a NaN, null or undefined in `f64` becomes null, so that
 * SQL's averages and sorts pass over it.
 * @throws RangeError for columns of unequal length or a number that is no 32-bit integer in `i32`
 */
export function* columnsToBatches<S extends TableShape>(
  shape: S,
  columns: Columns<S>,
): Generator<RecordBatch> {
  const schema = tableSchema(shape);
  const rows = rowCount(shape, columns);
  for (let from = 0; from < rows;) {
    const to = batchEnd(shape, columns, from, rows);
    const children = Object.entries(shape).map(([name, type]) =>
      columnData(name, type, columns[name]!, from, to)
    );
    const type = new Struct(schema.fields);
    yield new RecordBatch(schema, makeData({ type, length: to - from, nullCount: 0, children }));
    from = to;
  }
}

function rowCount<S extends TableShape>(shape: S, columns: Columns<S>): number {
  const names = Object.keys(shape);
  const rows = names.length === 0 ? 0 : columns[names[0]!]!.length;
  const odd = names.find((name) => columns[name]!.length !== rows);
  if (odd === undefined) return rows;
  throw new RangeError(
    `Cannot make a table: column "${odd}" has ${columns[odd]!.length} values, "${names[0]}" has ${rows}`,
  );
}

function batchEnd<S extends TableShape>(shape: S, columns: Columns<S>, from: number, rows: number): number {
  const lists = Object.keys(shape).filter((name) => shape[name]!.endsWith("[]"))
    .map((name) => columns[name] as ArrayLike<ArrayLike<number> | null | undefined>);
  const most = Math.min(rows, from + BATCH_ROWS);
  if (lists.length === 0) return most;
  let items = 0;
  for (let row = from; row < most; row++) {
    for (const list of lists) items += list[row]?.length ?? 0;
    if (items > BATCH_LIST_ITEMS) return Math.max(row, from + 1);
  }
  return most;
}

function columnData(
  name: string,
  type: ColumnType,
  values: ArrayLike<unknown>,
  from: number,
  to: number,
): Data {
  const length = to - from;
  const valid = validity(type, values, from, to);
  const common = { length, nullCount: valid.nullCount, nullBitmap: valid.bitmap };
  switch (type) {
    case "f64":
      return makeData({ type: new Float64(), ...common, data: numbers(values, from, to) });
    case "i32":
      return makeData({ type: new Int32(), ...common, data: integers(name, values, from, to) });
    case "bool":
      return makeData({ type: new Bool(), ...common, data: booleans(name, values, from, to) });
    case "text":
      return makeData({ type: new Utf8(), ...common, ...textData(values, from, to) });
    case "f64[]":
    case "i32[]":
      return makeData({
        type: new List(itemField(type)),
        ...common,
        ...listData(name, type, values, from, to),
      });
  }
}

function validity(type: ColumnType, values: ArrayLike<unknown>, from: number, to: number) {
  const missing = (value: unknown) =>
    value === null || value === undefined || (type === "f64" && Number.isNaN(value));
  let nullCount = 0;
  for (let row = from; row < to; row++) if (missing(values[row])) nullCount++;
  const bitmap = nullCount === 0 ? null : bits(to - from, (i) => !missing(values[from + i]));
  return { nullCount, bitmap };
}

/** Arrow's bitmap: bit i of byte i >> 3, lowest first, padded to 8 bytes. */
function bits(length: number, test: (i: number) => boolean): Uint8Array {
  const out = new Uint8Array(Math.ceil(length / 64) * 8);
  for (let i = 0; i < length; i++) if (test(i)) out[i >> 3]! |= 1 << (i & 7);
  return out;
}

function booleans(name: string, values: ArrayLike<unknown>, from: number, to: number): Uint8Array {
  return bits(to - from, (i) => {
    const value = values[from + i];
    if (typeof value !== "boolean") {
      throw new RangeError(`Cannot store ${value} in column "${name}": need true or false`);
    }
    return value;
  });
}

function numbers(values: ArrayLike<unknown>, from: number, to: number): Float64Array {
  if (values instanceof Float64Array) return values.slice(from, to);
  return Float64Array.from({ length: to - from }, (_, i) => (values[from + i] ?? NaN) as number);
}

function integers(name: string, values: ArrayLike<unknown>, from: number, to: number): Int32Array {
  const out = new Int32Array(to - from);
  for (let i = 0; i < out.length; i++) {
    const value = (values[from + i] ?? 0) as number;
    if ((value | 0) !== value) {
      throw new RangeError(`Cannot store ${value} in column "${name}": need a 32-bit integer`);
    }
    out[i] = value;
  }
  return out;
}

function textData(values: ArrayLike<unknown>, from: number, to: number) {
  const encoder = new TextEncoder();
  const valueOffsets = new Int32Array(to - from + 1);
  let data = new Uint8Array(16 * (to - from) + 64);
  let end = 0;
  for (let row = from; row < to; row++) {
    const text = (values[row] ?? "") as string;
    const most = end + 3 * text.length; // no UTF-16 unit takes more than three bytes
    if (most > data.length) {
      const larger = new Uint8Array(2 * most);
      larger.set(data.subarray(0, end));
      data = larger;
    }
    end += encoder.encodeInto(text, data.subarray(end)).written;
    valueOffsets[row - from + 1] = end;
  }
  return { valueOffsets, data: data.slice(0, end) };
}

function listData(
  name: string,
  type: "f64[]" | "i32[]",
  values: ArrayLike<unknown>,
  from: number,
  to: number,
) {
  const lists = values as ArrayLike<ArrayLike<number> | null | undefined>;
  const valueOffsets = new Int32Array(to - from + 1);
  for (let row = from; row < to; row++) {
    valueOffsets[row - from + 1] = valueOffsets[row - from]! + (lists[row]?.length ?? 0);
  }
  const flat = new Float64Array(valueOffsets[to - from]!);
  for (let row = from; row < to; row++) flat.set(lists[row] ?? [], valueOffsets[row - from]!);
  const child = columnData(`${name}[]`, type === "f64[]" ? "f64" : "i32", flat, 0, flat.length);
  return { valueOffsets, child };
}

/**
 * A batch with some of its columns, in its own order. (RecordBatch.select of apache-arrow 17 puts the columns in the wrong
 * places unless they are the first ones.)
 */
export function selectColumns(batch: RecordBatch, names: readonly string[]): RecordBatch {
  const kept = batch.schema.fields.flatMap((field, i) => names.includes(String(field.name)) ? [i] : []);
  const schema = new Schema(kept.map((i) => batch.schema.fields[i]!), batch.schema.metadata);
  const children = kept.map((i) => batch.data.children[i]!);
  return new RecordBatch(
    schema,
    makeData({ type: new Struct(schema.fields), length: batch.numRows, nullCount: 0, children }),
  );
}

/** A numeric column as numbers, missing as NaN. @throws RangeError for an unknown column */
export function numbersOf(table: Table | RecordBatch, name: string): Float64Array {
  const out = new Float64Array(table.numRows).fill(NaN);
  let row = 0;
  for (const value of column(table, name)) {
    if (value !== null) out[row] = Number(value);
    row++;
  }
  return out;
}

/** A text column, missing as null. @throws RangeError for an unknown column */
export function textsOf(table: Table | RecordBatch, name: string): (string | null)[] {
  return Array.from(column(table, name), (value) => value === null ? null : String(value));
}

function column(table: Table | RecordBatch, name: string): Iterable<unknown> {
  const found = table.getChild(name);
  if (found !== null) return found;
  const known = table.schema.fields.map((field) => String(field.name)).join(", ");
  throw new RangeError(`Cannot read column "${name}": found ${known}`);
}
