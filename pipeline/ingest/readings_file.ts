import type { ReadingKind } from "../../shared/schemas/readings.ts";
import { FileWatch, impossibleOnGuide } from "./cross_checks.ts";
import { streamTable } from "./csv_table.ts";
import { type FileOutcome, FileRun, type TakenFile, tooLong } from "./file_run.ts";
import type { Problem, Remarks } from "./issues.ts";
import type { KnownIds, Owner } from "./known_ids.ts";
import { checkRow, type Values } from "./row_values.ts";
import type { RunTables } from "./run_tables.ts";
import type { FileStyle } from "./style.ts";
import { ownColumns } from "../ingest_tables.ts";

/** Reads a CSV file of any kind but walls into the kind's table. */
export async function readReadings(
  path: string,
  file: TakenFile & { readonly kind: Exclude<ReadingKind, "walls"> },
  style: FileStyle,
  known: KnownIds,
  tables: RunTables,
  remarks: Remarks,
): Promise<FileOutcome> {
  const kind = file.kind;
  const own = ownColumns(kind);
  const run = new FileRun(file, tables);
  const watch = new FileWatch(kind, file.name, remarks);
  tables.declare(kind);
  for await (const { plan, rows } of streamTable(path, file.name, kind, style, remarks)) {
    for (const { cells, line, tooLong: cut } of rows) {
      const checked = cut ? { problem: tooLong } : checkRow(plan, cells);
      if (checked.problem !== undefined) {
        run.quarantine(line, cells, checked.problem);
        continue;
      }
      const values = kind === "tuning" ? inOrder(checked.values) : checked.values;
      if (kind === "facets") {
        const coating = String(values["coating_run"]);
        run.accept("coating_run", coating);
        watch.see(values, null, line);
        tables.append(kind, [
          ...run.origin(line),
          "coating_run",
          coating,
          ...own.map((column) => values[column] ?? null),
        ]);
        continue;
      }
      const owner = ownerOf(known, values);
      const problem = "scope" in owner ? impossibleOnGuide(kind, values, owner) : owner;
      if (problem !== null) {
        run.quarantine(line, cells, problem);
        continue;
      }
      const { scope, unit, die, guide } = owner as Owner;
      run.accept(scope, unit);
      watch.see(values, owner as Owner, line);
      tables.append(kind, [
        ...run.origin(line),
        scope,
        unit,
        values["wafer"],
        values["die"] ?? null,
        values["guide"] ?? null,
        die,
        guide?.id ?? null,
        ...own.map((column) => values[column] ?? null),
      ]);
    }
    await tables.drain();
  }
  watch.finish();
  return run.finish();
}

const ownerOf = (known: KnownIds, values: Values): Owner | Problem =>
  known.owner(String(values["wafer"]), textOrNull(values["die"]), textOrNull(values["guide"]));

const textOrNull = (value: string | number | null | undefined): string | null =>
  value === null || value === undefined ? null : String(value);

/** The order of the inputs is free: TE comes first in the ledger, so that equal processes have equal names. */
function inOrder(values: Values): Values {
  return { ...values, polarisations: String(values["polarisations"]).replace("TM+TE>", "TE+TM>") };
}
