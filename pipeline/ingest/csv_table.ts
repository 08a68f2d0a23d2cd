import { InputError, quoteValue } from "../../shared/errors.ts";
import type { TableKind } from "../../shared/schemas/lot.ts";
import { type CsvRow, streamCsv } from "./csv_rows.ts";
import { checkUnitsRow, type ColumnPlan, planColumns, requiredColumns } from "./headings.ts";
import type { Remarks } from "./issues.ts";
import { isDecimalComma } from "./number_cell.ts";
import type { FileStyle } from "./style.ts";

/** Rows that are looked at before the first is used, for decimal commas that lot.json does not declare. */
const SNIFFED_ROWS = 20;

/** Data rows of a file, with what its headings mean. */
export interface TablePart {
  readonly plan: ColumnPlan;
  readonly rows: readonly CsvRow[];
}

/**
 * Streams the data rows of a CSV file of a run folder.
 * @param name the file as the user knows it
 * @throws InputError for a file without headings, wrong headings, or a way of writing that lot.json does not declare
 */
export async function* streamTable(
  path: string,
  name: string,
  kind: TableKind,
  style: FileStyle,
  remarks: Remarks,
): AsyncGenerator<TablePart> {
  let plan: ColumnPlan | null = null;
  let headings: readonly string[] = [];
  let unitsDue = style.unitsRow;
  let first: CsvRow[] | null = [];
  for await (const part of streamCsv(path, name, style)) {
    const rows = [...part];
    if (plan === null) {
      const head = rows.shift()!;
      refuseLongHeadings(name, head);
      headings = head.cells;
      plan = planColumns(kind, name, head.line, headings, style, remarks);
    }
    if (unitsDue && rows.length > 0) {
      const units = rows.shift()!;
      checkUnitsRow(plan, name, units.line, headings, units.cells);
      unitsDue = false;
    }
    if (first !== null) {
      first.push(...rows);
      if (first.length < SNIFFED_ROWS) continue;
      refuseDecimalCommas(name, plan, first, style);
      yield { plan, rows: first };
      first = null;
    } else if (rows.length > 0) yield { plan, rows };
  }
  if (plan === null) {
    const skipped = style.skipLines > 0
      ? ` after the ${style.skipLines} lines that "skip_lines" leaves out`
      : "";
    throw new InputError(
      `Cannot read ${name}: it has no line of headings${skipped}; need ${requiredColumns(kind).join(",")}`,
      { file: name },
    );
  }
  if (first !== null && first.length > 0) {
    refuseDecimalCommas(name, plan, first, style);
    yield { plan, rows: first };
  }
}

function refuseLongHeadings(name: string, head: CsvRow): void {
  if (head.tooLong === undefined) return;
  throw new InputError(
    `Cannot read ${name}:${head.line}: the line of headings is longer than a megabyte; it begins with ${
      quoteValue(head.cells[0])
    }`,
    { file: name, line: head.line },
  );
}

/** One number with a comma is a slip, and its row is kept aside; most rows with one are a way of writing. */
function refuseDecimalCommas(
  name: string,
  plan: ColumnPlan,
  rows: readonly CsvRow[],
  style: FileStyle,
): void {
  if (style.decimalDeclared) return;
  const numbers = plan.columns.filter((column) => column.isNumber && column.cell >= 0);
  const seen = rows.slice(0, SNIFFED_ROWS).filter((row) => row.cells.length === plan.cells);
  const commaCell = (row: CsvRow) => numbers.find((column) => isDecimalComma(row.cells[column.cell]!));
  const hits = seen.filter((row) => commaCell(row) !== undefined);
  if (hits.length < 2 || 2 * hits.length < seen.length) return;
  const row = hits[0]!;
  const column = commaCell(row)!;
  const cell = row.cells[column.cell]!;
  throw new InputError(
    `Cannot read ${name}:${row.line}, column "${column.name}": found decimal commas such as ${
      quoteValue(cell)
    }, need a point; ` +
      `declare them in lot.json: "reading_style": { "${plan.kind}": { "decimal": "," } }`,
    { file: name, line: row.line, column: column.name, value: cell },
  );
}
