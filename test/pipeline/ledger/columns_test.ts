import assert from "node:assert/strict";
import fc from "fast-check";
import { Table } from "apache-arrow";
import {
  columnsToBatches,
  numbersOf,
  selectColumns,
  tableSchema,
  textsOf,
} from "../../../pipeline/ledger/columns.ts";
import { filterBatch } from "../../../pipeline/ledger/active.ts";
import { openTableFile } from "../../../pipeline/ledger/parquet_read.ts";
import { writeTableFile } from "../../../pipeline/ledger/parquet_write.ts";
import { withFolder } from "./a_ledger.ts";

const SHAPE = { t: "text", x: "f64", k: "i32", b: "bool", xs: "f64[]", ks: "i32[]" } as const;
type Row = {
  t: string | null;
  x: number | null;
  k: number | null;
  b: boolean;
  xs: number[] | null;
  ks: number[] | null;
};

const anyRow: fc.Arbitrary<Row> = fc.record({
  t: fc.option(fc.string({ unit: "grapheme" })),
  x: fc.option(fc.double({ noNaN: true })),
  k: fc.option(fc.integer({ min: -(2 ** 31), max: 2 ** 31 - 1 })),
  b: fc.boolean(),
  xs: fc.option(fc.array(fc.double({ noNaN: true }), { maxLength: 5 })),
  ks: fc.option(fc.array(fc.integer({ min: -(2 ** 31), max: 2 ** 31 - 1 }), { maxLength: 5 })),
}, { noNullPrototype: true });

const columnsOf = (rows: readonly Row[]) => ({
  t: rows.map((row) => row.t),
  x: rows.map((row) => row.x),
  k: rows.map((row) => row.k),
  b: rows.map((row) => row.b),
  xs: rows.map((row) => row.xs),
  ks: rows.map((row) => row.ks),
});

// deno-lint-ignore no-explicit-any -- whatever the file holds
const rowsOf = (table: any): Row[] =>
  Array.from({ length: table.numRows }, (_, i) => {
    const row = table.get(i);
    const list = (name: string) => row[name] === null ? null : Array.from(row[name] as Iterable<number>);
    return { t: row.t, x: row.x, k: row.k, b: row.b, xs: list("xs"), ks: list("ks") };
  });

Deno.test("columns of any values come back from a Parquet file as they went in", () =>
  withFolder(async (folder) => {
    let n = 0;
    const roundTrip = async (rows: Row[]) => {
      const path = `${folder}/${n++}.parquet`;
      const writer = writeTableFile(path, tableSchema(SHAPE));
      for (const batch of columnsToBatches(SHAPE, columnsOf(rows))) await writer.write(batch);
      assert.equal((await writer.finish()).rows, rows.length);
      using file = await openTableFile(path);
      assert.deepEqual(rowsOf(await file.read()), rows);
      const partial = await file.read({ columns: ["xs", "k"] });
      assert.deepEqual(Array.from(numbersOf(partial, "k")), rows.map((row) => row.k ?? NaN));
    };
    await roundTrip([]);
    await fc.assert(fc.asyncProperty(fc.array(anyRow, { maxLength: 40 }), roundTrip), { numRuns: 40 });
  }));

Deno.test("filtered slices of a batch, written and read again, are the rows that were kept", () =>
  withFolder(async (folder) => {
    let n = 0;
    const property = async (rows: Row[], files: number[]) => {
      const shape = { file_name: "text", ...SHAPE } as const;
      const named = rows.map((row, i) => ({ ...row, file_name: `${files[i % files.length]}` }));
      const columns = { file_name: named.map((row) => row.file_name), ...columnsOf(named) };
      const filter = { all: false, none: false, column: "file_name", keep: new Set(["0", "2"]) } as const;
      const path = `${folder}/${n++}.parquet`;
      const writer = writeTableFile(path, tableSchema(SHAPE));
      for (const batch of columnsToBatches(shape, columns)) {
        for (const slice of filterBatch(batch, filter)) {
          await writer.write(selectColumns(slice, Object.keys(SHAPE)));
        }
      }
      await writer.finish();
      using file = await openTableFile(path);
      const kept = named.filter((row) => row.file_name !== "1").map(({ file_name: _, ...row }) => row);
      assert.deepEqual(rowsOf(await file.read()), kept);
    };
    const files = fc.array(fc.integer({ min: 0, max: 2 }), { minLength: 1, maxLength: 30 });
    await fc.assert(fc.asyncProperty(fc.array(anyRow, { maxLength: 60 }), files, property), { numRuns: 40 });
  }));

Deno.test("NaN, null and undefined are missing; an infinity is a number", () => {
  const [batch] = [...columnsToBatches({ x: "f64" }, { x: [NaN, null, undefined, Infinity, 0] })];
  assert.equal(batch!.getChild("x")!.nullCount, 3);
  assert.deepEqual([...numbersOf(batch!, "x")], [NaN, NaN, NaN, Infinity, 0]);
  const [typed] = [...columnsToBatches({ x: "f64" }, { x: Float64Array.of(1, NaN) })];
  assert.deepEqual([...typed!.getChild("x")!], [1, null]);
});

Deno.test("many rows are cut into batches, and long lists into more", () => {
  const plain = [...columnsToBatches({ x: "f64" }, { x: new Float64Array(150_000) })];
  assert.deepEqual(plain.map((batch) => batch.numRows), [65_536, 65_536, 18_928]);
  const walls = Array.from({ length: 7 }, () => new Float64Array(400_000));
  const lists = [...columnsToBatches({ walls: "f64[]" }, { walls })];
  assert.deepEqual(lists.map((batch) => batch.numRows), [2, 2, 2, 1]);
  const [one, two] = columnsToBatches({ walls: "f64[]" }, { walls: [new Float64Array(3e6), [1]] });
  assert.deepEqual([one!.numRows, two!.numRows], [1, 1]);
});

Deno.test("columns that do not belong together are refused", () => {
  assert.throws(() => [...columnsToBatches({ a: "f64", b: "text" }, { a: [1, 2], b: ["x"] })], {
    name: "RangeError",
    message: /column "b" has 1 values, "a" has 2/,
  });
  for (const k of [1.5, 2 ** 31, NaN, Infinity]) {
    assert.throws(() => [...columnsToBatches({ k: "i32" }, { k: [k] })], /need a 32-bit integer/);
  }
  const flags = [true, null] as boolean[];
  assert.throws(
    () => [...columnsToBatches({ b: "bool" }, { b: flags })],
    /null in column "b".*true or false/,
  );
});

Deno.test("columns are read as numbers and as text, and an unknown one is named", () => {
  const table = new Table([...columnsToBatches({ t: "text", k: "i32" }, { t: ["ä", null], k: [7, null] })]);
  assert.deepEqual(textsOf(table, "t"), ["ä", null]);
  assert.deepEqual([...numbersOf(table, "k")], [7, NaN]);
  assert.throws(() => numbersOf(table, "x"), /Cannot read column "x": found t, k/);
});

Deno.test("selectColumns() keeps every column under its own name, in any order asked for", () => {
  const [batch] = [...columnsToBatches({ a: "f64", b: "f64", c: "text" }, { a: [1], b: [2], c: ["z"] })];
  const picked = selectColumns(batch!, ["c", "b"]);
  assert.deepEqual(picked.schema.names, ["b", "c"]);
  assert.deepEqual([picked.getChild("b")!.get(0), picked.getChild("c")!.get(0)], [2, "z"]);
});
