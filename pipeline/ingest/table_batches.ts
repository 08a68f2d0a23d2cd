import {
  type Data,
  DataType,
  type Field,
  Float64,
  makeData,
  RecordBatch,
  type Schema,
  Struct,
} from "apache-arrow";

/** Rows of a batch: enough to be quick, few enough to be small. */
export const BATCH_ROWS = 16_384;

/** Gathers rows into Arrow record batches. Cells come in the order of the schema; null is an empty cell. */
export class TableBatches {
  readonly #columns: unknown[][];
  #rows = 0;

  constructor(readonly schema: Schema) {
    this.#columns = schema.fields.map(() => []);
  }

  get rows(): number {
    return this.#rows;
  }

  append(cells: readonly unknown[]): void {
    const { fields } = this.schema;
    if (cells.length !== fields.length) {
      throw new RangeError(`Cannot append a row of ${cells.length} cells: need ${fields.length}`);
    }
    for (let i = 0; i < fields.length; i++) {
      const cell = cells[i] ?? null;
      if (cell === null && !fields[i]!.nullable) {
        throw new TypeError(`Cannot append an empty cell to column "${fields[i]!.name}": need a value`);
      }
      this.#columns[i]!.push(cell);
    }
    this.#rows++;
  }

  /** The rows so far as one batch; the next row begins a new one. */
  take(): RecordBatch {
    const children = this.schema.fields.map((field, i) => columnData(field, this.#columns[i]!));
    const length = this.#rows;
    this.#rows = 0;
    for (const column of this.#columns) column.length = 0;
    const type = new Struct(this.schema.fields);
    return new RecordBatch(this.schema, makeData({ type, length, nullCount: 0, children }));
  }
}

// The library's own builders turn every cell into bytes by itself, which took most of the time of reading a file.
function columnData({ name, type }: Field, cells: readonly unknown[]): Data {
  const { nullCount, nullBitmap } = validity(cells);
  const length = cells.length;
  if (DataType.isUtf8(type)) {
    const { data, valueOffsets } = utf8(cells as readonly (string | null)[]);
    return makeData({ type, length, nullCount, nullBitmap, valueOffsets, data });
  }
  if (DataType.isFloat(type)) {
    const data = Float64Array.from(cells as number[], (cell) => cell ?? 0);
    return makeData({ type: type as Float64, length, nullCount, nullBitmap, data });
  }
  if (DataType.isInt(type)) {
    const data = Int32Array.from(cells as number[], (cell) => cell ?? 0);
    return makeData({ type, length, nullCount, nullBitmap, data });
  }
  if (DataType.isList(type)) {
    const lists = cells as readonly Float64Array[];
    const valueOffsets = offsetsOf(lists.map((list) => list.length));
    const data = new Float64Array(valueOffsets[length]!);
    lists.forEach((list, i) => data.set(list, valueOffsets[i]!));
    const child = makeData({ type: new Float64(), length: data.length, nullCount: 0, data });
    return makeData({ type, length, nullCount, nullBitmap, valueOffsets, child });
  }
  throw new TypeError(
    `Cannot write column "${name}": type ${type} is not one of text, numbers and lists of numbers`,
  );
}

/** One bit per cell, set where there is a value, lowest bit first. */
function validity(cells: readonly unknown[]): { nullCount: number; nullBitmap: Uint8Array | null } {
  const bits = new Uint8Array(Math.ceil(cells.length / 8));
  let values = 0;
  for (let i = 0; i < cells.length; i++) {
    if (cells[i] === null) continue;
    bits[i >> 3]! |= 1 << (i & 7);
    values++;
  }
  const nullCount = cells.length - values;
  return { nullCount, nullBitmap: nullCount === 0 ? null : bits };
}

function utf8(cells: readonly (string | null)[]): { data: Uint8Array; valueOffsets: Int32Array } {
  const encoder = new TextEncoder();
  const joined = cells.join(""); // null joins as nothing
  const data = encoder.encode(joined);
  // As many bytes as characters: all of it is ASCII, and lengths in characters are lengths in bytes.
  const length = data.length === joined.length
    ? (cell: string | null) => cell?.length ?? 0
    : (cell: string | null) => cell === null ? 0 : encoder.encode(cell).length;
  return { data, valueOffsets: offsetsOf(cells.map(length)) };
}

function offsetsOf(lengths: readonly number[]): Int32Array {
  const offsets = new Int32Array(lengths.length + 1);
  for (let i = 0; i < lengths.length; i++) offsets[i + 1] = offsets[i]! + lengths[i]!;
  return offsets;
}
