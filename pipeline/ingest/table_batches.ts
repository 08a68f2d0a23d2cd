import {
  type Builder,
  type Field,
  Float64,
  Int32,
  List,
  makeBuilder,
  makeData,
  RecordBatch,
  type Schema,
  Struct,
  Utf8,
} from "apache-arrow";

/** Rows of a batch: enough to be quick, few enough to be small. */
export const BATCH_ROWS = 16_384;

/** Gathers rows into Arrow record batches. Cells come in the order of the schema; null is an empty cell. */
export class TableBatches {
  readonly #builders: Builder[];
  #rows = 0;

  constructor(readonly schema: Schema) {
    this.#builders = schema.fields.map((field: Field) =>
      makeBuilder({ type: field.type, nullValues: [null] })
    );
  }

  get rows(): number {
    return this.#rows;
  }

  append(cells: readonly unknown[]): void {
    if (cells.length !== this.#builders.length) {
      throw new RangeError(`Cannot append a row of ${cells.length} cells: need ${this.#builders.length}`);
    }
    for (let i = 0; i < cells.length; i++) {
      const cell = cells[i];
      if ((cell === null || cell === undefined) && !this.schema.fields[i]!.nullable) {
        throw new TypeError(
          `Cannot append an empty cell to column "${this.schema.fields[i]!.name}": need a value`,
        );
      }
      this.#builders[i]!.append(cell ?? null);
    }
    this.#rows++;
  }

  /** The rows so far as one batch; the next row begins a new one. */
  take(): RecordBatch {
    const children = this.#builders.map((builder) => builder.flush());
    const length = this.#rows;
    this.#rows = 0;
    return new RecordBatch(
      this.schema,
      makeData({ type: new Struct(this.schema.fields), length, nullCount: 0, children }),
    );
  }
}

export const text = (): Utf8 => new Utf8();
export const float = (): Float64 => new Float64();
export const integer = (): Int32 => new Int32();
export { List };
