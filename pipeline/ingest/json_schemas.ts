import { guideRowJsonSchema } from "../../shared/schemas/guides.ts";
import { lotJsonSchema } from "../../shared/schemas/lot.ts";
import { READING_KINDS, readingJsonSchema } from "../../shared/schemas/readings.ts";

/** JSON Schemas of a run folder's files: `lot` for lot.json, the others for one row of a table. */
export function jsonSchemas(): Record<string, Record<string, unknown>> {
  return {
    lot: lotJsonSchema(),
    guides: guideRowJsonSchema(),
    ...Object.fromEntries(READING_KINDS.map((kind) => [kind, readingJsonSchema(kind)])),
  };
}
