import type { Schema } from "apache-arrow";
import { isNumberColumn } from "../../shared/schemas/lot.ts";
import { READING_KINDS, READING_SCHEMAS, type ReadingKind } from "../../shared/schemas/readings.ts";
import { type ColumnType, tableSchema, type TableShape } from "../ledger/mod.ts";

const SOURCE = { file_name: "text", source_file: "text", source_line: "i32" } as const;

const READING_TABLES = Object.fromEntries(READING_KINDS.map((kind) => [kind, readingShape(kind)]));

/**
 * Columns of the tables that a ledger may not hold yet: a query about them gets no rows, not an error. Where a run holds
 * the table, its own columns count.
 */
const SHAPES: Readonly<Record<string, TableShape>> = {
  lots: { lot: "text", platform: "text", started: "text", ...SOURCE },
  wafers: { wafer: "text", diameter_mm: "f64", substrate_batch: "text", ...SOURCE },
  guides: {
    wafer: "text",
    die: "text",
    die_id: "text",
    guide: "text",
    guide_id: "text",
    x_mm: "f64",
    y_mm: "f64",
    group: "text",
    width_um: "f64",
    period_um: "f64",
    length_mm: "f64",
    poled_from_mm: "f64",
    poled_length_mm: "f64",
    ...SOURCE,
  },
  steps: {
    wafer: "text",
    order: "i32",
    step: "text",
    tool: "text",
    recipe: "text",
    finished: "text",
    settings: "text",
    ...SOURCE,
  },
  coatings: { die_id: "text", facet: "text", coating_run: "text", entry: "i32", ...SOURCE },
  unavailable: { die_id: "text", reason: "text", ...SOURCE },
  ...READING_TABLES,
  quarantine: {
    file_name: "text",
    source_file: "text",
    source_line: "i32",
    column: "text",
    value: "text",
    reason: "text",
  },
  remarks: { file_name: "text", source_file: "text", source_line: "i32", code: "text", statement: "text" },
};

function readingShape(kind: ReadingKind): TableShape {
  if (kind === "walls") {
    return {
      guide_id: "text",
      position_um: "f64[]",
      source_line: "i32[]",
      file_name: "text",
      source_file: "text",
    };
  }
  const place: TableShape = kind === "facets" ? {} : { scope: "text", unit: "text" };
  const own = Object.keys(READING_SCHEMAS[kind].shape).map((column): [string, ColumnType] => [
    column,
    isNumberColumn(kind, column) ? "f64" : "text",
  ]);
  return { ...place, ...Object.fromEntries(own), ...SOURCE };
}

/** Names of the tables that always exist for a query. */
export const BASE_TABLES: readonly string[] = Object.keys(SHAPES);

/** Columns of a table that no run holds, or null for a name that is no base table's. */
export const baseSchema = (table: string): Schema | null => {
  const shape = SHAPES[table];
  return shape === undefined ? null : tableSchema(shape);
};
