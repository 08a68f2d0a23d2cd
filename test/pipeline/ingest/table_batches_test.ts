import assert from "node:assert/strict";
import { Field, Float64, Int32, List, Schema, Table, tableFromIPC, tableToIPC, Utf8 } from "apache-arrow";
import fc from "fast-check";
import { TableBatches } from "../../../pipeline/ingest/table_batches.ts";

const SCHEMA = new Schema([
  new Field("text", new Utf8(), true),
  new Field("number", new Float64(), true),
  new Field("whole", new Int32(), false),
  new Field("list", new List(new Field("item", new Float64(), false)), false),
]);

type Cells = [string | null, number | null, number, Float64Array];

Deno.test("rows come out of a batch, and through Arrow's own format, as they went in", () => {
  // Beyond ASCII, empty, paired surrogates; but no byte-order mark in front, which the reader's decoder takes for one.
  const text = fc.option(fc.string({ unit: "binary", maxLength: 5 }).filter((s) => !s.startsWith("\ufeff")));
  const row = fc.tuple(
    text,
    fc.option(fc.double({ noNaN: true })),
    fc.integer(),
    fc.array(fc.double({ noNaN: true }), { maxLength: 4 }).map((list) => Float64Array.from(list)),
  );
  fc.assert(
    fc.property(fc.array(row, { maxLength: 20 }), fc.array(row, { maxLength: 20 }), (first, second) => {
      const batches = new TableBatches(SCHEMA);
      for (const rows of [first, second] as Cells[][]) { // a batch that was taken leaves nothing behind
        for (const cells of rows) batches.append(cells);
        assert.equal(batches.rows, rows.length);
        const table = tableFromIPC(tableToIPC(new Table([batches.take()]), "stream"));
        const out = table.toArray().map((r) => [r["text"], r["number"], r["whole"], [...r["list"]]]);
        assert.deepEqual(out, rows.map(([a, b, c, list]) => [a, b, c, [...list]]));
        assert.equal(batches.rows, 0);
      }
    }),
  );
});

Deno.test("a row that does not fit the schema is refused", () => {
  const batches = new TableBatches(SCHEMA);
  assert.throws(() => batches.append(["a", 1, 2]), /Cannot append a row of 3 cells: need 4/);
  assert.throws(() => batches.append(["a", 1, null, new Float64Array(0)]), /empty cell to column "whole"/);
});
