import assert from "node:assert/strict";
import { Table, tableToIPC } from "apache-arrow";
import fc from "fast-check";
import { type Engine, startEngine } from "../../../pipeline/query/engine.ts";
import { columnsToBatches, tableSchema } from "../../../pipeline/ledger/columns.ts";

const permissions: Deno.PermissionOptions = {
  read: true,
  env: true,
  sys: ["cpus"],
  net: false,
  write: false,
  run: false,
  ffi: false,
};
let shared: Engine | null = null;
const engine = async (): Promise<Engine> => shared ??= await startEngine();
const row = async (sql: string) => (await engine()).query(sql).rows[0];

Deno.test({
  name: "numbers, texts and nulls come out as JSON has them",
  permissions,
  fn: async () => {
    const cells = await row(
      "SELECT 1, 2.5, 1.25::DECIMAL(10, 3), 'ä', NULL, true, -0.1::FLOAT::DOUBLE > -0.2",
    );
    assert.deepEqual(cells, [1, 2.5, 1.25, "ä", null, true, true]);
    assert.deepEqual(await row("SELECT count(*), sum(i), avg(i) FROM range(1, 5) t(i)"), [4, 10, 2.5]);
    assert.deepEqual(await row("SELECT -170141183460469231731687303715884105727::HUGEINT"), [
      "-170141183460469231731687303715884105727",
    ]);
  },
});

Deno.test({
  name: "a whole number beyond 2^53 comes out exact, as text",
  permissions,
  fn: async () => {
    assert.deepEqual(await row("SELECT 9007199254740991::BIGINT, 9007199254740992::BIGINT, -5::BIGINT"), [
      9007199254740991,
      "9007199254740992",
      -5,
    ]);
    assert.deepEqual(await row("SELECT -1.5::DECIMAL(38, 10), 0.001::DECIMAL(4, 3)"), [-1.5, 0.001]);
  },
});

Deno.test({
  name: "dates and times come out in ISO 8601",
  permissions,
  fn: async () => {
    assert.deepEqual(
      await row(
        "SELECT DATE '2026-09-14', TIMESTAMP '2026-09-14 10:20:00.5', TIME '10:20:00.25', TIMESTAMPTZ '2026-09-14 10:20:00+02:00'",
      ),
      ["2026-09-14", "2026-09-14T10:20:00.500Z", "10:20:00.250", "2026-09-14T08:20:00.000Z"],
    );
    assert.deepEqual(await row("SELECT '1969-12-31'::DATE"), ["1969-12-31"]);
  },
});

Deno.test({
  name: "lists, structs, maps, enums and bytes come out plain",
  permissions,
  fn: async () => {
    assert.deepEqual(
      await row(
        "SELECT [1, NULL, 3], {'a': 1, 'b': [{'c': 'x'}]}, MAP {'k': 2}, 'b'::ENUM('a', 'b'), '\\x0f'::BLOB",
      ),
      [[1, null, 3], { a: 1, b: [{ c: "x" }] }, { k: 2 }, "b", "0f"],
    );
  },
});

Deno.test({
  name: "an interval is refused, because the decoder misreads it",
  permissions,
  fn: async () => {
    const db = await engine();
    assert.throws(() => db.query("SELECT INTERVAL 3 DAYS"), /cast it to text/);
    assert.deepEqual(await row("SELECT (INTERVAL 3 DAYS)::VARCHAR"), ["3 days"]);
  },
});

const shape = { t: "text", x: "f64", k: "i32", b: "bool", xs: "f64[]" } as const;

Deno.test({
  name: "tables of any values come back from the engine as they went in",
  permissions,
  fn: async () => {
    const db = await engine();
    const anyRow = fc.record({
      t: fc.option(fc.string({ unit: "grapheme" }).filter((text) => !text.includes("\u0000"))),
      x: fc.option(fc.double({ noNaN: true })),
      k: fc.option(fc.integer({ min: -(2 ** 31), max: 2 ** 31 - 1 })),
      b: fc.boolean(),
      xs: fc.option(fc.array(fc.double({ noNaN: true }), { maxLength: 4 })),
    });
    const property = (
      rows: { t: string | null; x: number | null; k: number | null; b: boolean; xs: number[] | null }[],
    ) => {
      const columns = {
        t: rows.map((r) => r.t),
        x: rows.map((r) => r.x),
        k: rows.map((r) => r.k),
        b: rows.map((r) => r.b),
        xs: rows.map((r) => r.xs),
      };
      db.run("DROP TABLE IF EXISTS any_values");
      db.createTable({ table: "any_values" }, tableSchema(shape));
      db.insert({ table: "any_values" }, columnsToBatches(shape, columns));
      const found = db.query("SELECT t, x, k, b, xs FROM any_values").rows;
      assert.deepEqual(found, rows.map((r) => [r.t, r.x, r.k, r.b, r.xs]));
    };
    fc.assert(fc.property(fc.array(anyRow, { maxLength: 30 }), property), { numRuns: 60 });
    property(Array.from({ length: 3000 }, () => ({ t: null, x: null, k: null, b: true, xs: null })));
  },
});

Deno.test({
  name: "a slice of a batch is loaded as that slice",
  permissions,
  fn: async () => {
    const db = await engine();
    const n = 1000;
    const [batch] = [...columnsToBatches(shape, {
      t: Array.from({ length: n }, (_, i) => i % 3 ? `row ${i}` : null),
      x: Float64Array.from({ length: n }, (_, i) => i % 5 ? i : NaN),
      k: Int32Array.from({ length: n }, (_, i) => i),
      b: Array.from({ length: n }, (_, i) => i % 2 === 1),
      xs: Array.from({ length: n }, (_, i) => i % 4 ? [i, i / 2] : null),
    })];
    for (const [name, from, to] of [["s1", 3, 14], ["s2", 64, 65], ["s3", 509, 1000]] as const) {
      db.createTable({ table: name }, batch!.schema);
      db.insert({ table: name }, [batch!.slice(from, to)]);
      const expected = Array.from({ length: to - from }, (_, j) => j + from).map((i) => [
        i % 3 ? `row ${i}` : null,
        i % 5 ? i : null,
        i,
        i % 2 === 1,
        i % 4 ? [i, i / 2] : null,
      ]);
      assert.deepEqual(db.query(`SELECT * FROM ${name}`).rows, expected);
    }
  },
});

Deno.test({
  name: "a table without rows has its columns, and IPC bytes load like a table",
  permissions,
  fn: async () => {
    const db = await engine();
    db.createTable({ table: "nothing" }, tableSchema(shape));
    const empty = db.query("SELECT * FROM nothing");
    assert.deepEqual(empty.columns.map((column) => column.name), ["t", "x", "k", "b", "xs"]);
    assert.deepEqual(empty.rows, []);
    const table = new Table([...columnsToBatches({ x: "f64" }, { x: [1, 2] })]);
    db.loadTable({ table: "from_bytes" }, tableToIPC(table, "stream"));
    assert.deepEqual(db.query("SELECT sum(x) FROM from_bytes").rows, [[3]]);
    const odd = 'we"ird name';
    db.loadTable({ table: odd }, table);
    assert.deepEqual(db.query('SELECT count(*) FROM "we""ird name"').rows, [[2]]);
  },
});

Deno.test({
  name: "a query reaches no file, no network and no setting",
  permissions,
  fn: async () => {
    const db = await engine();
    const attempts = [
      "SELECT * FROM read_csv('/etc/passwd')",
      "SELECT * FROM '/etc/passwd'",
      "SELECT * FROM read_text('/etc/passwd')",
      "SELECT * FROM glob('/*')",
      "COPY (SELECT 1) TO '/tmp/wavelot-should-not-exist.csv'",
      "ATTACH '/tmp/wavelot-should-not-exist.db'",
      "LOAD json",
      "SET enable_external_access = true",
      "SELECT json_extract('{}', '$.a')",
    ];
    for (const attempt of attempts) assert.throws(() => db.query(attempt), Error, attempt);
    assert.throws(() => db.query("SELECT 1; SELECT 2"), /multiple statements/);
    assert.deepEqual(db.query("SELECT 1").rows, [[1]], "the engine goes on");
  },
});
