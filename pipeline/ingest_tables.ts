import { Field, Float64, Int32, List, Schema, Utf8 } from "apache-arrow";
import { z } from "zod";
import { guideRowSchema } from "../shared/schemas/guides.ts";
import { isNumberColumn, type TableKind } from "../shared/schemas/lot.ts";
import { READING_KINDS, READING_SCHEMAS, type ReadingKind } from "../shared/schemas/readings.ts";

const text = (name: string, nullable = false) => new Field(name, new Utf8(), nullable);
const float = (name: string, nullable = false) => new Field(name, new Float64(), nullable);
const integer = (name: string, nullable = false) => new Field(name, new Int32(), nullable);

/** Where a row comes from. `source_line` is the line of a text file, the row of a Parquet file, 1 for JSON. */
const origin = () => [text("lot"), text("file_name"), text("source_file"), integer("source_line")];

/** What a row is about: `unit` is the full id of the guide, die, wafer or coating run that `scope` says. */
const about = () => [text("scope"), text("unit")];

const place = () => [
  text("wafer"),
  text("die", true),
  text("guide", true),
  text("die_id", true),
  text("guide_id", true),
];

const PLACE_COLUMNS = ["wafer", "die", "guide"];

/** Columns of a kind that are its own: all but wafer, die and guide. */
export function ownColumns(kind: TableKind): string[] {
  const shape = kind === "guides" ? guideRowSchema.shape : READING_SCHEMAS[kind].shape;
  return Object.keys(shape).filter((column) => !PLACE_COLUMNS.includes(column));
}

function ownFields(kind: TableKind): Field[] {
  const shape: Record<string, unknown> = kind === "guides"
    ? guideRowSchema.shape
    : READING_SCHEMAS[kind].shape;
  return ownColumns(kind).map((column) => {
    const field = shape[column];
    const nullable = field instanceof z.ZodOptional || field instanceof z.ZodNullable;
    if (!isNumberColumn(kind, column)) return text(column, nullable);
    return field instanceof z.ZodNumber && field.format === "safeint"
      ? integer(column)
      : float(column, nullable);
  });
}

function readingFields(kind: Exclude<ReadingKind, "walls">): Field[] {
  return [...origin(), ...about(), ...(kind === "facets" ? [] : place()), ...ownFields(kind)];
}

/**
 * Arrow schemas of all tables of an ingest run. Readings have one table per kind; `walls` is packed: a row is an unbroken
 * run of accepted walls of one guide, `positions_um[k]` on line `source_line + k`, and `quarantined` counts the guide's
 * wall rows of this file that were kept aside up to there (the largest over the guide's rows is the whole count; a row
 * without positions only brings a later count).
 */
export const TABLE_SCHEMAS: Readonly<Record<string, Schema>> = {
  lots: new Schema([...origin(), text("platform"), text("started", true)]),
  wafers: new Schema([
    ...origin(),
    text("wafer"),
    float("diameter_mm", true),
    text("substrate_batch", true),
  ]),
  steps: new Schema([
    ...origin(),
    text("wafer"),
    integer("order"),
    text("step"),
    text("tool", true),
    text("recipe", true),
    text("finished", true),
    text("settings"),
  ]),
  coatings: new Schema([
    ...origin(),
    integer("entry"),
    text("coating_run"),
    text("facet"),
    text("wafer"),
    text("die_id"),
  ]),
  unavailable: new Schema([...origin(), text("wafer"), text("die_id"), text("reason")]),
  guides: new Schema([...origin(), ...about(), ...place(), ...ownFields("guides")]),
  ...Object.fromEntries(
    READING_KINDS.filter((kind) => kind !== "walls").map((kind) => [kind, new Schema(readingFields(kind))]),
  ),
  walls: new Schema([
    ...origin(),
    integer("source_line_last"),
    ...about(),
    ...place(),
    new Field("positions_um", new List(float("item")), false),
    integer("quarantined"),
    text("measured_at", true),
    text("instrument", true),
  ]),
  quarantine: new Schema([
    ...origin(),
    text("kind"),
    text("column"),
    text("value"),
    text("reason"),
    text("wanted"),
    text("row"),
  ]),
  remarks: new Schema([...origin(), text("code"), text("statement")]),
  /** How many accepted rows of a file belong to which guide, die, wafer or coating run. */
  coverage: new Schema([...origin(), text("kind"), ...about(), integer("rows")]),
};
