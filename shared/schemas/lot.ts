// Pure: no I/O, no clock, no hidden randomness.
import { z } from "zod";
import { guideRowSchema } from "./guides.ts";
import { dieIdSchema, idSchema, momentSchema, nameSchema } from "./ids.ts";
import { didYouMean, nearestId, nearestWord } from "./nearest.ts";
import { kindOfStem, READING_KINDS, READING_SCHEMAS, type ReadingKind } from "./readings.ts";

/** What a table of a run folder holds: the design or a kind of reading. */
export type TableKind = ReadingKind | "guides";

/** The row schema of a table of a run folder. */
export const rowSchema = (kind: TableKind): z.ZodObject =>
  kind === "guides" ? guideRowSchema : READING_SCHEMAS[kind];

const EVERY_COLUMN: ReadonlySet<string> = new Set(
  ["guides" as const, ...READING_KINDS].flatMap((kind) => Object.keys(rowSchema(kind).shape)),
);

/** A strict object whose message for an unknown key names the nearest known one. */
function strict<Shape extends z.ZodRawShape>(shape: Shape) {
  const known = Object.keys(shape);
  return z.strictObject(shape, {
    error: (issue) => {
      if (issue.code !== "unrecognized_keys") return undefined;
      const keys = (issue as unknown as { keys: readonly string[] }).keys;
      return keys.map((key) =>
        `unknown key ${JSON.stringify(key.slice(0, 60))}${didYouMean(nearestWord(key, known))}; known: ${
          known.join(", ")
        }`
      ).join("; ");
    },
  });
}

const wafer = strict({
  wafer: idSchema,
  diameter_mm: z.number().gt(0).max(1000).optional(),
  substrate_batch: idSchema.optional(),
});

const step = strict({
  wafer: idSchema,
  order: z.number().int(),
  step: z.string().min(1).max(200),
  tool: z.string().min(1).max(200).optional(),
  recipe: z.string().min(1).max(200).optional(),
  finished: momentSchema.optional(),
  settings: z.record(z.string(), z.union([z.number(), z.string(), z.boolean(), z.null()])).default({}),
});

const coating = strict({
  coating_run: idSchema,
  facet: z.enum(["in", "out"]),
  dies: z.array(dieIdSchema),
});

const unavailable = strict({ die: dieIdSchema, reason: z.string().min(1).max(500) });

/** Where a heading's values go: the column, and value·times + plus in the column's unit. */
const target = z.union([
  z.string().min(1),
  strict({ to: z.string().min(1), times: z.number().optional(), plus: z.number().optional() }),
]);

/** How a file is written, where it differs from plain comma-separated values with one line of headings. */
const style = strict({
  delimiter: z.string().length(1).regex(/[^\s"\p{L}\p{N}.+-]|\t/u, 'need one character such as ";" or "\\t"')
    .optional(),
  decimal: z.enum([".", ","]).optional(),
  skip_lines: z.number().int().min(0).max(100_000).optional(),
  units_row: z.boolean().optional(),
  constants: z.record(z.string(), z.union([z.string(), z.number()])).optional(),
  name_pattern: z.string().min(1).max(200).optional(),
});
export type ReadingStyle = z.infer<typeof style>;

const shape = {
  $schema: z.string().optional(),
  lot: nameSchema,
  platform: nameSchema,
  started: z.iso.date({ error: 'need a date such as "2026-09-14"' }).optional(),
  wafers: z.array(wafer).min(1),
  steps: z.array(step).default([]),
  coatings: z.array(coating).default([]),
  unavailable: z.array(unavailable).default([]),
  columns: z.record(z.string(), z.record(z.string(), target)).default({}),
  reading_style: z.record(z.string(), style).default({}),
};

/** `lot.json`: what was made, from what, on which tools. Dies are checked against guides.csv by the stage that reads both. */
export const lotSchema = strict(shape).superRefine((lot, context) => {
  const wafers = lot.wafers.map((w) => w.wafer);
  const say = (path: PropertyKey[], input: unknown, message: string) =>
    context.addIssue({ code: "custom", path, input, message });
  wafers.forEach((id, i) => {
    if (wafers.indexOf(id) < i) {
      say(["wafers", i, "wafer"], id, "this wafer is listed before; need each wafer once");
    }
  });
  const unknownWafer = (id: string, path: PropertyKey[]) => {
    if (wafers.includes(id)) return;
    say(path, id, `no such wafer${didYouMean(nearestId(id, wafers))}; "wafers" lists ${wafers.join(", ")}`);
  };
  lot.steps.forEach((s, i) => unknownWafer(s.wafer, ["steps", i, "wafer"]));
  lot.coatings.forEach((c, i) =>
    c.dies.forEach((die, k) => unknownWafer(die.split("/", 1)[0]!, ["coatings", i, "dies", k]))
  );
  lot.unavailable.forEach((u, i) => unknownWafer(u.die.split("/", 1)[0]!, ["unavailable", i, "die"]));
  for (const section of ["columns", "reading_style"] as const) {
    for (const key of Object.keys(lot[section])) {
      if (key === "guides" || kindOfStem(key.replace(/\.(csv|parquet)$/, "")) !== null) continue;
      const kinds = [...READING_KINDS, "guides"];
      say(
        [section, key],
        key,
        `no kind of reading and no reading file${didYouMean(nearestWord(key, kinds))}; kinds: ${
          kinds.join(", ")
        }`,
      );
    }
  }
  for (const [key, map] of Object.entries(lot.columns)) {
    for (const [heading, to] of Object.entries(map)) checkTarget(key, heading, to);
  }
  function checkTarget(key: string, heading: string, to: z.infer<typeof target>): void {
    const kind = kindOfKey(key);
    if (kind === null) return;
    const known = Object.keys(rowSchema(kind).shape);
    const name = typeof to === "string" ? to : to.to;
    if (!known.includes(name)) {
      if (EVERY_COLUMN.has(name)) return; // known, but not of this kind: the heading is not read
      say(
        ["columns", key, heading],
        name,
        `there is no such column${didYouMean(nearestWord(name, known))}; columns of ${kind}: ${
          known.join(", ")
        }`,
      );
    } else if (typeof to !== "string" && !isNumberColumn(kind, name)) {
      say(["columns", key, heading], name, `this column holds text; "times" and "plus" are for numbers`);
    } else if (typeof to !== "string" && to.times === 0) {
      say(["columns", key, heading, "times"], 0, "0 would make every value the same; need another factor");
    }
  }
});
export type Lot = z.infer<typeof lotSchema>;

/** The kind that a key of `columns` or `reading_style` (a kind, a file's stem or a file's name) is about. */
export const kindOfKey = (key: string): TableKind | null => {
  const stem = key.replace(/\.(csv|parquet)$/, "");
  return stem === "guides" ? "guides" : kindOfStem(stem);
};

/** Whether a column holds numbers. */
export function isNumberColumn(kind: TableKind, column: string): boolean {
  let type: unknown = rowSchema(kind).shape[column];
  while (type instanceof z.ZodOptional || type instanceof z.ZodNullable) type = type.unwrap();
  return type instanceof z.ZodNumber;
}

/** JSON Schema of lot.json, for editors that complete and check it. */
export const lotJsonSchema = (): Record<string, unknown> =>
  z.toJSONSchema(lotSchema, { io: "input" }) as Record<string, unknown>;
