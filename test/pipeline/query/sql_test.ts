import assert from "node:assert/strict";
import { engineWith, runSql, tableNames } from "../../../pipeline/query/sql.ts";
import { type Ledger, openLedger, tableStream } from "../../../pipeline/ledger/mod.ts";
import { bytes, commitFiles, commitTable, withLedger } from "../ledger/a_ledger.ts";

const rows = async (ledger: Ledger, sql: string) => (await runSql(ledger, sql)).rows;

Deno.test("a query sees only the rows in force, and tells their lot and run", () =>
  withLedger(async (ledger) => {
    await commitFiles(ledger, "K07", [
      { name: "cutback.csv", text: "1", values: [1, 2] },
      { name: "cutback-2.csv", text: "2", values: [3] },
    ]);
    const second = await commitFiles(ledger, "K07", [{ name: "cutback-2.csv", text: "3", values: [30] }]);
    await commitFiles(ledger, "K08", [{ name: "cutback.csv", text: "4", values: [400] }]);
    assert.deepEqual(await rows(ledger, "SELECT sum(value), count(*) FROM cutback"), [[433, 4]]);
    assert.deepEqual(await rows(ledger, "SELECT lot, sum(value) FROM cutback GROUP BY lot ORDER BY lot"), [
      ["K07", 33],
      ["K08", 400],
    ]);
    assert.deepEqual(await rows(ledger, "SELECT run FROM cutback WHERE value = 30"), [[second.run]]);
    const limited = await runSql(ledger, "SELECT sum(value) FROM cutback", { lots: ["K08"] });
    assert.deepEqual(limited.rows, [[400]]);
    const all = await runSql(ledger, "SELECT * FROM cutback ORDER BY value");
    assert.deepEqual(all.rows.map((row) => row[all.columns.findIndex((c) => c.name === "value")]), [
      1,
      2,
      30,
      400,
    ]);
  }));

Deno.test("`files` and `runs` tell what was taken in and what of it is in force", () =>
  withLedger(async (ledger) => {
    const first = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "1", values: [1, 2] }]);
    const second = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "2", values: [3] }]);
    assert.deepEqual(await rows(ledger, "SELECT name, run, accepted, in_force FROM files ORDER BY run"), [
      ["a.csv", first.run, 2, false],
      ["a.csv", second.run, 1, true],
    ]);
    assert.deepEqual(await rows(ledger, "SELECT sequence, kind, lot, in_force FROM runs ORDER BY sequence"), [
      [1, "ingest", "K07", false],
      [2, "ingest", "K07", true],
    ]);
  }));

Deno.test("tables of computed runs are there by name, the newest run per lot and request", () =>
  withLedger(async (ledger) => {
    const shape = { guide_id: "text", mean: "f64" } as const;
    const predict = (request: string, mean: number) =>
      commitTable(ledger, { kind: "predict", table: "figures", lot: "K07", request }, shape, {
        guide_id: ["K07-1/05/g1"],
        mean: [mean],
      });
    await predict("pairs", 1);
    await predict("pairs", 2);
    const wider = { ...shape, u: "f64" } as const;
    await commitTable(ledger, { kind: "predict", table: "figures", lot: "K07", request: "doubling" }, wider, {
      guide_id: ["K07-1/05/g1"],
      mean: [3],
      u: [0.5],
    });
    assert.deepEqual(await rows(ledger, "SELECT request, mean, u FROM figures ORDER BY mean"), [
      ["pairs", 2, null],
      ["doubling", 3, 0.5],
    ]);
  }));

Deno.test("tables that no run holds answer with no rows, but with their columns", () =>
  withLedger(async (ledger) => {
    const tables = [
      "guides",
      "dies",
      "walls",
      "cutback",
      "tuning",
      "steps",
      "coatings",
      "quarantine",
      "remarks",
    ];
    using engine = await engineWith(ledger, tables);
    for (const table of tables) {
      const found = engine.query(`SELECT * FROM ${table}`);
      assert.deepEqual(found.rows, [], table);
      const names = found.columns.map((column) => column.name);
      assert.ok(names.includes("lot") && names.length >= 6, `${table}: ${names}`);
    }
    assert.deepEqual(await rows(ledger, "SELECT die_id, guides FROM dies"), []);
  }));

Deno.test("SHOW and DESCRIBE tell every table and its columns without reading a row", () =>
  withLedger(async (ledger) => {
    const run = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "1", values: [1, 2] }]);
    assert.deepEqual((await rows(ledger, "SHOW TABLES")).map((row) => row[0]), await tableNames(ledger));
    const described = await rows(ledger, "DESCRIBE cutback");
    assert.deepEqual(described.map((row) => row[0]), [
      "lot",
      "file_name",
      "source_file",
      "source_line",
      "value",
      "run",
    ]);
    // A damaged table is no hindrance to that; a query of its rows is refused.
    const path = `${ledger.directory}/runs/${run.run}/cutback.parquet`;
    const content = await Deno.readFile(path);
    content[20]! ^= 1;
    await Deno.writeFile(path, content);
    await using reader = await openLedger(ledger.directory, { write: false });
    assert.equal((await rows(reader, "DESCRIBE cutback")).length, 6);
    await assert.rejects(rows(reader, "SELECT value FROM cutback"), { name: "LedgerError", exitCode: 3 });
  }));

Deno.test("`walls` has a row per wall with its own line; `coatings` and `dies` tell the entry that counts", () =>
  withLedger(async (ledger) => {
    const original = await ledger.stageOriginal(bytes("x"));
    const source = (n: number) => ({
      lot: Array(n).fill("K07"),
      file_name: Array(n).fill("x"),
      source_file: Array(n).fill(original.sha256),
    });
    const from = { lot: "text", file_name: "text", source_file: "text", source_line: "i32" } as const;
    const input = { name: "x", kind: "lot", sha256: original.sha256, rows: 0, accepted: 0, quarantined: 0 };
    await ledger.commit({
      kind: "ingest",
      lot: "K07",
      inputs: [input],
      parents: [],
      parameters: {},
      modelVersion: "1",
      originals: [original],
      tables: {
        walls: tableStream(
          { ...from, wafer: "text", die_id: "text", guide_id: "text", positions_um: "f64[]" },
          {
            ...source(3),
            wafer: Array(3).fill("K07-1"),
            die_id: Array(3).fill("K07-1/05"),
            guide_id: ["g1", "g1", "g2"],
            source_line: [2, 7, 9],
            positions_um: [[10, 20.5], [], [30, 40, 50]],
          },
        ),
        guides: tableStream(
          { ...from, wafer: "text", die_id: "text", guide_id: "text", x_mm: "f64", y_mm: "f64" },
          {
            ...source(3),
            source_line: [2, 3, 4],
            wafer: Array(3).fill("K07-1"),
            die_id: ["K07-1/05", "K07-1/05", "K07-1/06"],
            guide_id: ["g1", "g2", "g3"],
            x_mm: [1, 1, 2],
            y_mm: [0, 0, 0],
          },
        ),
        coatings: tableStream(
          { ...from, die_id: "text", facet: "text", coating_run: "text", entry: "i32" },
          {
            ...source(4),
            source_line: [1, 1, 1, 1],
            die_id: ["K07-1/05", "K07-1/05", "K07-1/05", "K07-1/06"],
            facet: ["in", "in", "out", "in"],
            coating_run: ["C9", "C1", "C5", "C9"],
            entry: [0, 2, 1, 0],
          },
        ),
        unavailable: tableStream(
          { ...from, die_id: "text", reason: "text" },
          { ...source(1), source_line: [1], die_id: ["K07-1/06"], reason: ["cut for loss measurement"] },
        ),
      },
    });
    assert.deepEqual(
      await rows(ledger, "SELECT guide_id, position_um, source_line FROM walls ORDER BY source_line"),
      [
        ["g1", 10, 2],
        ["g1", 20.5, 3],
        ["g2", 30, 9],
        ["g2", 40, 10],
        ["g2", 50, 11],
      ],
    );
    assert.deepEqual(await rows(ledger, "SELECT count(*) FROM walls"), [[5]]);
    assert.deepEqual(
      await rows(ledger, "SELECT coating_run FROM coatings WHERE counts ORDER BY coating_run"),
      [
        ["C1"],
        ["C5"],
        ["C9"],
      ],
    );
    assert.deepEqual(
      await rows(
        ledger,
        "SELECT die_id, guides, coating_in, coating_out, unavailable FROM dies ORDER BY die_id",
      ),
      [["K07-1/05", 2, "C1", "C5", null], ["K07-1/06", 1, "C9", null, "cut for loss measurement"]],
    );
  }));

Deno.test("a wrong query is the caller's mistake, and the message helps", () =>
  withLedger(async (ledger) => {
    const cases: [string, RegExp][] = [
      ["SELECT * FROM guidez", /found no table "guidez" \(did you mean "guides"\?\).*cutback/],
      ["SELECT xmm FROM guides", /xmm.*x_mm/s],
      ["SELECT FROM WHERE", /syntax error/i],
      ["DELETE FROM guides", /need a statement that reads/],
      ["SELECT 1; SELECT 2", /more than one statement/],
      ["SELECT 'a' + INTERVAL 1 DAY FROM guides", /Cannot run the query/],
      ["SELECT * FROM read_csv('/etc/passwd')", /disabled/],
    ];
    for (const [sql, message] of cases) {
      await assert.rejects(runSql(ledger, sql), { name: "InputError", exitCode: 2, message }, sql);
    }
  }));

Deno.test("a plan comes out line by line", () =>
  withLedger(async (ledger) => {
    const plan = await runSql(ledger, "EXPLAIN SELECT 1");
    assert.deepEqual(plan.columns.map((column) => column.name), ["plan"]);
    assert.ok(plan.rows.length > 3 && plan.rows.every(([line]) => !String(line).includes("\n")));
  }));

Deno.test("engineWith() loads the views that are named, and what they are made of", () =>
  withLedger(async (ledger) => {
    await commitFiles(ledger, "K07", [{ name: "a.csv", text: "1", values: [1, 2] }]);
    using engine = await engineWith(ledger, ["cutback", "dies"]);
    assert.deepEqual(engine.query("SELECT count(*) FROM cutback").rows, [[2]]);
    assert.deepEqual(engine.query("SELECT count(*) FROM dies").rows, [[0]]);
    assert.throws(() => engine.query("SELECT count(*) FROM modes"));
  }));
