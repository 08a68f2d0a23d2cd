import { streamTable } from "./csv_table.ts";
import { type FileOutcome, FileRun, type TakenFile, tooLong } from "./file_run.ts";
import type { ColumnPlan } from "./headings.ts";
import type { Remarks } from "./issues.ts";
import type { KnownGuide, KnownIds } from "./known_ids.ts";
import { parseNumber } from "./number_cell.ts";
import { checkRow } from "./row_values.ts";
import type { RunTables } from "./run_tables.ts";
import type { FileStyle } from "./style.ts";
import { type WallRun, WallRuns } from "./wall_runs.ts";

/** Wall rows of one file on their way into table `walls`: shared by both file formats. */
export function wallSink(run: FileRun, known: KnownIds, tables: RunTables): WallRuns {
  tables.declare("walls");
  return new WallRuns(known, (packed: WallRun) => {
    const { guide } = packed;
    const [wafer, die, name] = guide.id.split("/");
    tables.append("walls", [
      ...run.origin(packed.line),
      packed.lastLine,
      "guide",
      guide.id,
      wafer,
      die,
      name,
      guide.die,
      guide.id,
      packed.positions_um,
      packed.quarantined,
      packed.measured_at,
      packed.instrument,
    ], packed.positions_um.length);
  });
}

/** Reads `walls*.csv`. Rows of one guide come by the thousand: what repeats from row to row is checked once. */
export async function readWallsCsv(
  path: string,
  file: TakenFile,
  style: FileStyle,
  known: KnownIds,
  tables: RunTables,
  remarks: Remarks,
): Promise<FileOutcome> {
  const run = new FileRun(file, tables);
  const walls = wallSink(run, known, tables);
  let before: Accepted | null = null;
  for await (const { plan, rows } of streamTable(path, file.name, "walls", style, remarks)) {
    const [position, others] = splitCells(plan);
    for (const { cells, line, tooLong: cut } of rows) {
      if (cut) {
        walls.bad(null, line);
        run.quarantine(line, cells, tooLong);
        continue;
      }
      const quick = before !== null && cells.length === plan.cells && sameCells(before.cells, cells, others)
        ? quickPosition(plan, position, cells)
        : null;
      if (quick === null) {
        const checked: Accepted | null = checkWall(plan, cells, line);
        if (checked === null) continue;
        before = checked;
      }
      const { guide, measured, instrument } = before!;
      const problem = walls.wall(guide, quick ?? before!.position, line, measured, instrument);
      if (problem === null) run.accept("guide", guide.id);
      else run.quarantine(line, cells, problem);
    }
    await tables.drain();
  }
  walls.end();
  return run.finish();

  function checkWall(plan: ColumnPlan, cells: readonly string[], line: number): Accepted | null {
    const checked = checkRow(plan, cells);
    if (checked.problem !== undefined) {
      walls.bad(cells.length === plan.cells ? probableOwner(plan, cells) : null, line);
      run.quarantine(line, cells, checked.problem);
      return null;
    }
    const { wafer, die, guide, position_um, measured_at, instrument } = checked.values;
    const owner = known.owner(String(wafer), String(die), String(guide));
    if (!("scope" in owner)) {
      const meant = known.probableGuide(String(wafer), String(die), String(guide));
      if (meant === null) walls.stray(line);
      else walls.bad(meant, line);
      run.quarantine(line, cells, owner);
      return null;
    }
    return {
      cells,
      guide: owner.guide!,
      position: Number(position_um),
      measured: measured_at === null ? null : String(measured_at),
      instrument: instrument === null ? null : String(instrument),
    };
  }

  function probableOwner(plan: ColumnPlan, cells: readonly string[]): KnownGuide | null {
    const [wafer, die, guide] = ["wafer", "die", "guide"].map((name) => {
      const column = plan.columns.find((c) => c.name === name)!;
      return String(column.cell < 0 ? column.constant ?? "" : cells[column.cell]);
    });
    return known.probableGuide(wafer!, die!, guide!);
  }
}

interface Accepted {
  readonly cells: readonly string[];
  readonly guide: KnownGuide;
  readonly position: number;
  readonly measured: string | null;
  readonly instrument: string | null;
}

/** Index of the position's cell, and of all other cells that are read. */
function splitCells(plan: ColumnPlan): [number, number[]] {
  const read = plan.columns.filter((column) => column.cell >= 0);
  const position = plan.columns.find((column) => column.name === "position_um")!.cell;
  return [position, read.map((column) => column.cell).filter((cell) => cell !== position)];
}

function sameCells(a: readonly string[], b: readonly string[], at: readonly number[]): boolean {
  for (const i of at) if (a[i] !== b[i]) return false;
  return true;
}

/** The position alone, when it is a number above 0; anything else takes the long way, which says what is wrong. */
function quickPosition(plan: ColumnPlan, cell: number, cells: readonly string[]): number | null {
  if (cell < 0) return null;
  const column = plan.columns.find((c) => c.cell === cell)!;
  const number = parseNumber(cells[cell]!, plan.decimal);
  if (typeof number !== "number") return null;
  const position = number * column.times + column.plus;
  return position > 0 && Number.isFinite(position) ? position : null;
}
