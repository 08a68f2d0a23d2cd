import assert from "node:assert/strict";
import { schemaFiles } from "../../pipeline/write_schemas.ts";

Deno.test({
  name: "the JSON Schemas in the tree are those of the zod objects (else: deno task schemas)",
  permissions: { read: true, env: true },
  fn: async () => {
    const files = schemaFiles();
    assert.ok(
      files.has("lot.schema.json") && files.has("request.schema.json") && files.has("platform.schema.json"),
    );
    for (const [name, text] of files) {
      assert.equal(await Deno.readTextFile(`shared/schemas/json/${name}`), text, name);
    }
  },
});
