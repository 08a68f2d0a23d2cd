import { idSchema } from "../../shared/schemas/ids.ts";
import type { GuideRow } from "../../shared/schemas/guides.ts";
import { dieId, guideId } from "../../shared/ids.ts";
import type { Lot } from "../../shared/schemas/lot.ts";
import { streamTable } from "./csv_table.ts";
import type { ColumnPlan } from "./headings.ts";
import { type FileOutcome, FileRun, type TakenFile, tooLong } from "./file_run.ts";
import { type Problem, Remarks } from "./issues.ts";
import type { KnownIds } from "./known_ids.ts";
import { checkRow } from "./row_values.ts";
import type { RunTables } from "./run_tables.ts";
import { type FileStyle, fileStyle } from "./style.ts";
import { GUIDES_FILE } from "./run_folder.ts";
import { ownColumns } from "../ingest_tables.ts";

const OWN = ownColumns("guides");

/**
 * Reads guides.csv: its guides become known, its rows go into table `guides`.
 * @param tables null when the file is read for its ids only
 */
export async function readGuides(
  path: string,
  file: TakenFile,
  style: FileStyle,
  known: KnownIds,
  tables: RunTables | null,
  remarks: Remarks,
): Promise<FileOutcome> {
  const run = new FileRun(file, tables);
  const centres = new Map<string, { x: number; y: number; line: number; told: boolean }>();
  for await (const { plan, rows } of streamTable(path, file.name, "guides", style, remarks)) {
    for (const { cells, line, tooLong: cut } of rows) {
      const checked = cut ? { problem: tooLong } : checkRow(plan, cells);
      if (checked.problem !== undefined) {
        noteDie(plan, cells, known);
        run.quarantine(line, cells, checked.problem);
        continue;
      }
      const row = checked.values as unknown as GuideRow;
      const problem = poledOutside(row) ?? known.addGuide(row);
      if (problem !== null) {
        noteDie(plan, cells, known);
        run.quarantine(line, cells, problem);
        continue;
      }
      const die = dieId(row.wafer, row.die);
      const id = guideId(row.wafer, row.die, row.guide);
      sameCentre(row, die, line);
      run.accept("guide", id);
      tables?.append("guides", [
        ...run.origin(line),
        "guide",
        id,
        row.wafer,
        row.die,
        row.guide,
        die,
        id,
        ...OWN.map((column) => checked.values[column] ?? null),
      ]);
    }
    await tables?.drain();
  }
  return run.finish();

  function sameCentre(row: GuideRow, die: string, line: number): void {
    const first = centres.get(die);
    if (first === undefined) centres.set(die, { x: row.x_mm, y: row.y_mm, line, told: false });
    else if (!first.told && (first.x !== row.x_mm || first.y !== row.y_mm)) {
      first.told = true;
      remarks.add(
        "die_centre",
        file.name,
        `die ${die} is at (${row.x_mm}, ${row.y_mm}) mm here and at (${first.x}, ${first.y}) mm on line ${first.line}; x_mm and y_mm are the die's centre`,
        line,
      );
    }
  }
}

/** Learns the ids of a guides.csv that the ledger holds already, with its remarks and quarantined rows. */
export async function learnGuides(path: string, lot: Lot, known: KnownIds): Promise<void> {
  const file = { lot: lot.lot, name: GUIDES_FILE, kind: "guides" as const, sha256: "" };
  await readGuides(path, file, fileStyle(lot, "guides", GUIDES_FILE), known, null, new Remarks());
}

function poledOutside(row: GuideRow): Problem | null {
  const end = row.poled_from_mm + row.poled_length_mm;
  if (end <= row.length_mm + 1e-6) return null;
  return {
    column: "poled_length_mm",
    value: String(row.poled_length_mm),
    reason: `the poled section ends at ${
      Number(end.toPrecision(12))
    } mm, beyond the guide's ${row.length_mm} mm`,
    wanted: "poled_from_mm + poled_length_mm within length_mm",
  };
}

/** A die is known by its name also when the row that names it cannot be used: lot.json may speak of it. */
function noteDie(plan: ColumnPlan, cells: readonly string[], known: KnownIds): void {
  const [wafer, die] = ["wafer", "die"].map((name) => {
    const column = plan.columns.find((c) => c.name === name)!;
    return column.cell < 0 ? column.constant : cells[column.cell];
  });
  if (
    idSchema.safeParse(wafer).success && idSchema.safeParse(die).success &&
    known.wafers.includes(String(wafer))
  ) {
    known.nameDie(String(wafer), String(die));
  }
}
