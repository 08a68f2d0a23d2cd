import { csvText } from "./csv_text.ts";
import { outputWidth, useColour } from "./terminal.ts";
import { type TableColumn, textTable } from "./text_table.ts";
import { type Cell, jsonText } from "./values.ts";

export const FORMATS = ["table", "csv", "json"] as const;
export type Format = typeof FORMATS[number];

/** Rows in any of the three formats; as JSON, one object per row. */
export function formatRows(
  format: Format,
  columns: readonly TableColumn[],
  rows: readonly (readonly Cell[])[],
): string {
  switch (format) {
    case "table":
      return textTable(columns, rows, { width: outputWidth(), colour: useColour() });
    case "csv":
      return csvText(columns.map((column) => column.title), rows);
    case "json":
      return jsonText(rowObjects(columns.map((column) => column.title), rows)) + "\n";
  }
}

/** Rows as objects; a name that comes twice gets a number, so that no column is lost. */
export function rowObjects(
  names: readonly string[],
  rows: readonly (readonly Cell[])[],
): Record<string, Cell>[] {
  const keys: string[] = [];
  for (const name of names) {
    let key = name;
    for (let n = 2; keys.includes(key); n++) key = `${name} (${n})`;
    keys.push(key);
  }
  return rows.map((row) => Object.fromEntries(keys.map((key, i) => [key, row[i] ?? null])));
}
