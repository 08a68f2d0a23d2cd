import assert from "node:assert/strict";
import { columnsToBatches, numbersOf, tableSchema } from "../../../pipeline/ledger/columns.ts";
import { openTableFile } from "../../../pipeline/ledger/parquet_read.ts";
import { writeTableFile } from "../../../pipeline/ledger/parquet_write.ts";
import { sha256 } from "../../../pipeline/ledger/disk.ts";
import { withFolder } from "./a_ledger.ts";

const shape = { guide: "text", walls: "f64[]" } as const;

/** Writes `guides` rows of 2,000 walls each; wall k of guide g stands at g + k/4096. */
async function writeWalls(path: string, guides: number) {
  const writer = writeTableFile(path, tableSchema(shape));
  for (let g = 0; g < guides; g++) {
    const walls = Float64Array.from({ length: 2000 }, (_, k) => g + k / 4096);
    for (const batch of columnsToBatches(shape, { guide: [`g${g}`], walls: [walls] })) {
      await writer.write(batch);
    }
  }
  return await writer.finish();
}

Deno.test("a large table is cut into row groups that are read one at a time, in order", () =>
  withFolder(async (folder) => {
    const path = `${folder}/walls.parquet`;
    const written = await writeWalls(path, 5000);
    assert.equal(written.rows, 5000);
    assert.equal(written.sha256, sha256(await Deno.readFile(path)));
    using file = await openTableFile(path);
    assert.ok(file.rowGroups >= 2, `80 MB in ${file.rowGroups} row groups`);
    let g = 0;
    for await (const batch of file.stream()) {
      const walls = batch.getChild("walls")!;
      for (let i = 0; i < batch.numRows; i++, g++) {
        const own = walls.get(i).toArray() as Float64Array;
        assert.ok(own.length === 2000 && own[0] === g && own[1999] === g + 1999 / 4096, `guide ${g}`);
      }
      assert.ok(batch.numRows < 5000, `a batch holds ${batch.numRows} of 5000 guides`);
    }
    assert.equal(g, 5000);
    const last = await file.read({ rowGroups: [file.rowGroups - 1], columns: ["guide"] });
    assert.equal(last.getChild("guide")!.get(last.numRows - 1), "g4999");
    assert.deepEqual(last.schema.names, ["guide"]);
  }));

Deno.test("a batch with other columns is refused", () =>
  withFolder(async (folder) => {
    const writer = writeTableFile(`${folder}/x.parquet`, tableSchema({ a: "f64", b: "f64" }));
    const [batch] = [...columnsToBatches({ b: "f64", a: "f64" }, { b: [1], a: [2] })];
    await assert.rejects(writer.write(batch!), /found columns b, a, need a, b/);
    await writer.abort();
  }));

Deno.test("writes that are not awaited one by one still land in order", () =>
  withFolder(async (folder) => {
    const writer = writeTableFile(`${folder}/x.parquet`, tableSchema({ x: "f64" }));
    const batches = Array.from({ length: 20 }, (_, i) => [...columnsToBatches({ x: "f64" }, { x: [i] })][0]!);
    await Promise.all(batches.map((batch) => writer.write(batch)));
    await writer.finish();
    using file = await openTableFile(`${folder}/x.parquet`);
    assert.deepEqual([...numbersOf(await file.read(), "x")], Array.from({ length: 20 }, (_, i) => i));
  }));
