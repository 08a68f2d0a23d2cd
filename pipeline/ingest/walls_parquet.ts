import { type Data, DataType, type RecordBatch, type Schema, type Vector } from "apache-arrow";
import { InputError } from "../../shared/errors.ts";
import { type FileOutcome, FileRun, type TakenFile } from "./file_run.ts";
import { openForeignParquet } from "./foreign_parquet.ts";
import { type ColumnPlan, planColumns, type PlannedColumn } from "./headings.ts";
import type { Problem, Remarks } from "./issues.ts";
import type { KnownGuide, KnownIds } from "./known_ids.ts";
import { checkRow } from "./row_values.ts";
import type { RunTables } from "./run_tables.ts";
import type { FileStyle } from "./style.ts";
import { wallSink } from "./walls_file.ts";

/**
 * Reads `walls*.parquet`, one row group at a time. Columns have the names of the CSV file's headings; ids are text. Rows are
 * numbered from 1 in place of lines.
 * @throws InputError for a truncated file, or one that is no Parquet
 */
export async function readWallsParquet(
  path: string,
  file: TakenFile,
  style: FileStyle,
  known: KnownIds,
  tables: RunTables,
  remarks: Remarks,
): Promise<FileOutcome> {
  const run = new FileRun(file, tables);
  const walls = wallSink(run, known, tables);
  using parquet = await openForeignParquet(path, file.name);
  const headings = parquet.schema.fields.map((field) => field.name);
  const plan = planColumns("walls", file.name, 1, headings, { ...style, decimal: "." }, remarks);
  refuseOtherTypes(file.name, plan, parquet.schema);
  const position = plan.columns.find((column) => column.name === "position_um")!;
  let row = 1;
  for (let group = 0; group < parquet.rowGroups; group++) {
    for (const batch of await parquet.read(group)) {
      take(batch);
      await tables.drain();
    }
  }
  walls.end();
  return run.finish();

  function take(batch: RecordBatch): void {
    const texts = plan.columns.filter((c) => !c.isNumber && c.cell >= 0).map((c) =>
      batch.getChildAt(c.cell)!
    );
    const changed = texts.map((vector) => changesOf(vector));
    const numbers = position.cell < 0 ? null : batch.getChildAt(position.cell)!;
    let owner: Owner | null = null;
    for (let i = 0; i < batch.numRows; i++, row++) {
      const raw = numbers === null ? position.constant : numbers.get(i);
      const value = raw === null ? null : Number(raw) * position.times + position.plus;
      if (i === 0 || changed.some((at) => at(i))) owner = ownerOf(batch, i);
      const usable = value !== null && Number.isFinite(value) && value > 0;
      const problem = owner?.problem ?? (usable ? null : noPosition(batch, i));
      if (problem !== null && problem !== undefined) {
        if (owner !== null && owner.problem !== null && owner.guide === null) walls.stray(row);
        else walls.bad(owner?.guide ?? null, row);
        run.quarantine(row, cellsOf(batch, i), problem);
        continue;
      }
      const { guide, measured, instrument } = owner!;
      const misplaced = walls.wall(guide!, value!, row, measured, instrument);
      if (misplaced === null) run.accept("guide", guide!.id);
      else run.quarantine(row, cellsOf(batch, i), misplaced);
    }
  }

  interface Owner {
    readonly guide: KnownGuide | null;
    readonly problem: Problem | null;
    readonly measured: string | null;
    readonly instrument: string | null;
  }

  /** Checks the row as a CSV row would be, with a position that is fine: that one differs from row to row. */
  function ownerOf(batch: RecordBatch, i: number): Owner {
    const cells = cellsOf(batch, i).map((cell) => cell.trim());
    if (position.cell >= 0) cells[position.cell] = String((1 - position.plus) / position.times);
    const checked = checkRow(plan, cells);
    const [wafer, die, guide] = ["wafer", "die", "guide"].map((name) => {
      const column = plan.columns.find((c) => c.name === name)!;
      return String(column.cell < 0 ? column.constant ?? "" : cells[column.cell]);
    }) as [string, string, string];
    const probable = known.probableGuide(wafer, die, guide);
    if (checked.problem !== undefined) {
      return { guide: probable, problem: checked.problem, measured: null, instrument: null };
    }
    const owner = known.owner(wafer, die, guide);
    if (!("scope" in owner)) return { guide: probable, problem: owner, measured: null, instrument: null };
    const { measured_at, instrument } = checked.values;
    return {
      guide: owner.guide,
      problem: null,
      measured: measured_at === null ? null : String(measured_at),
      instrument: instrument === null ? null : String(instrument),
    };
  }

  function noPosition(batch: RecordBatch, i: number): Problem {
    const value = position.cell < 0 ? position.constant : batch.getChildAt(position.cell)!.get(i);
    return {
      column: "position_um",
      value: String(value ?? ""),
      reason: value === null ? "the cell is empty" : "the value is not a number above 0",
      wanted: "a number above 0",
    };
  }
}

const cellsOf = (batch: RecordBatch, i: number): string[] =>
  batch.schema.fields.map((_, k) => String(batch.getChildAt(k)!.get(i) ?? ""));

function refuseOtherTypes(name: string, plan: ColumnPlan, schema: Schema): void {
  const fits = (column: PlannedColumn, type: DataType): boolean => {
    const plain = DataType.isDictionary(type) ? type.dictionary : type;
    return column.isNumber
      ? DataType.isFloat(plain) || DataType.isInt(plain)
      : DataType.isUtf8(plain) || DataType.isLargeUtf8(plain);
  };
  for (const column of plan.columns) {
    const field = schema.fields[column.cell];
    if (field === undefined || fits(column, field.type)) continue;
    const need = column.isNumber ? "numbers" : "text (ids are text: 05 is not 5)";
    throw new InputError(
      `Cannot read ${name}: column "${field.name}" has type ${field.type}, need ${need}`,
      { file: name, column: field.name },
    );
  }
}

/** Tells of row i > 0 whether a text column differs from the row before, without decoding it. */
function changesOf(vector: Vector): (i: number) => boolean {
  const [data] = vector.data as readonly Data[];
  if (vector.data.length === 1 && data!.nullCount === 0) {
    if (DataType.isDictionary(vector.type)) {
      const keys = data!.values as ArrayLike<number | bigint>;
      return (i) => keys[i] !== keys[i - 1];
    }
    if (DataType.isUtf8(vector.type)) {
      const bytes = data!.values as Uint8Array;
      const offsets = data!.valueOffsets as Int32Array;
      return (i) => {
        const [a, b, c] = [offsets[i - 1]!, offsets[i]!, offsets[i + 1]!];
        if (b - a !== c - b) return true;
        for (let k = 0; k < b - a; k++) if (bytes[a + k] !== bytes[b + k]) return true;
        return false;
      };
    }
  }
  return (i) => vector.get(i) !== vector.get(i - 1);
}
