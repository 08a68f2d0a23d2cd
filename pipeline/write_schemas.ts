// Writes the JSON Schemas of all files that people write by hand: deno task schemas. Editors complete and check with them.
import { fileURLToPath } from "node:url";
import { z } from "zod";
import { platformSchema } from "../shared/schemas/platform.ts";
import { requestSchema } from "../shared/schemas/request.ts";
import { jsonSchemas } from "./ingest/mod.ts";
import { ownRulesSchema } from "./query/flag/rules_schema.ts";

const FOLDER = fileURLToPath(new URL("../shared/schemas/json/", import.meta.url));

/** File name → text, of every schema. */
export function schemaFiles(): Map<string, string> {
  const all: Record<string, unknown> = {
    ...jsonSchemas(),
    platform: z.toJSONSchema(platformSchema, { io: "input" }),
    request: z.toJSONSchema(requestSchema, { io: "input" }),
    "flag-rules": z.toJSONSchema(ownRulesSchema, { io: "input" }),
  };
  return new Map(
    Object.entries(all).map((
      [name, schema],
    ) => [`${name}.schema.json`, `${JSON.stringify(schema, null, 2)}\n`]),
  );
}

if (import.meta.main) {
  await Deno.mkdir(FOLDER, { recursive: true });
  for (const [name, text] of schemaFiles()) await Deno.writeTextFile(FOLDER + name, text);
}
