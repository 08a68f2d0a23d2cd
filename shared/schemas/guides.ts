// Pure: no I/O, no clock, no hidden randomness.
import { z } from "zod";
import { idSchema } from "./ids.ts";

const positive = z.number().gt(0).describe("a number above 0");
const notNegative = z.number().min(0).describe("a number, 0 or more");
const centre = z.number().min(-1000).max(1000).describe(
  "a distance of -1000…1000 mm from the wafer's centre",
);

/**
 * One row of `guides.csv`: a guide as designed. x, y: the die's centre from the wafer's centre. A guide that is not poled
 * has `poled_length_mm` 0.
 */
export const guideRowSchema = z.strictObject({
  wafer: idSchema,
  die: idSchema,
  x_mm: centre,
  y_mm: centre,
  guide: idSchema,
  group: z.string().max(200).nullable().describe("text"),
  width_um: positive,
  period_um: positive,
  length_mm: positive,
  poled_from_mm: notNegative,
  poled_length_mm: notNegative,
});
export type GuideRow = z.infer<typeof guideRowSchema>;

/** JSON Schema of one row of `guides.csv`. */
export const guideRowJsonSchema = (): Record<string, unknown> =>
  z.toJSONSchema(guideRowSchema, { io: "input" }) as Record<string, unknown>;
