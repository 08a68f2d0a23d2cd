import assert from "node:assert/strict";
import { numbersOf, openLedger } from "../../../pipeline/ledger/mod.ts";
import { sha256 } from "../../../pipeline/ledger/disk.ts";
import { bytes, commitFiles, commitTable, everythingIn, withFolder, withLedger } from "./a_ledger.ts";

const valuesInForce = async (ledger: Parameters<typeof commitFiles>[0], lot?: string) =>
  (await ledger.readActive("cutback", lot)).flatMap((part) => [...numbersOf(part.table, "value")]);

Deno.test("a committed run is read back by another reader, with its original byte for byte", () =>
  withFolder(async (folder) => {
    const text = "wafer,value\r\nK07-1,0.25\r\n\u0000\uFEFF";
    {
      await using ledger = await openLedger(folder, {
        write: true,
        now: () => new Date("2026-09-14T08:00:00Z"),
      });
      await commitFiles(ledger, "K07", [{ name: "readings/cutback.csv", text, values: [0.25, -3, 1e300] }]);
    }
    await using reader = await openLedger(folder, { write: false });
    const [run] = await reader.runs();
    assert.match(run!.run, /^000001-ingest-[0-9a-f]{8}$/);
    assert.equal(run!.created, "2026-09-14T08:00:00.000Z");
    assert.match(run!.program, /^wavelot \d+\.\d+\.\d+$/);
    assert.equal(run!.inputs[0]!.sha256, sha256(bytes(text)));
    assert.deepEqual(await Deno.readFile(reader.originalPath(sha256(text))), bytes(text));
    const table = await reader.readTable(run!, "cutback");
    assert.deepEqual([...numbersOf(table, "value")], [0.25, -3, 1e300]);
    assert.deepEqual([...numbersOf(table, "source_line")], [2, 3, 4]);
    const file = await Deno.readFile(`${folder}/runs/${run!.run}/cutback.parquet`);
    assert.equal(run!.tables.cutback!.sha256, sha256(file));
    assert.equal(run!.tables.cutback!.bytes, file.length);
  }));

Deno.test("nothing but originals, runs and the lock's file is left after a commit", () =>
  withFolder(async (folder) => {
    {
      await using ledger = await openLedger(folder, { write: true });
      const run = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
      const expected = [
        ".lock",
        ".staging",
        "originals",
        `originals/${sha256("a")}`,
        "runs",
        `runs/${run.run}`,
      ];
      expected.push(`runs/${run.run}/cutback.parquet`, `runs/${run.run}/manifest.json`);
      assert.deepEqual(await everythingIn(folder), expected.sort());
    }
    assert.equal((await everythingIn(folder)).length, 8);
  }));

Deno.test("the newest run that holds a file wins, and files it does not hold stay in force", () =>
  withLedger(async (ledger) => {
    await commitFiles(ledger, "K07", [
      { name: "cutback.csv", text: "first", values: [1, 2] },
      { name: "cutback-2.csv", text: "second", values: [3] },
      { name: "cutback-3.csv", text: "third", values: [4, 5] },
    ]);
    const second = await commitFiles(ledger, "K07", [{
      name: "cutback-2.csv",
      text: "changed",
      values: [30, 31],
    }]);
    await commitFiles(ledger, "K08", [{ name: "cutback.csv", text: "other lot", values: [100] }]);
    assert.deepEqual(await valuesInForce(ledger, "K07"), [1, 2, 4, 5, 30, 31]);
    assert.deepEqual(await valuesInForce(ledger, "K08"), [100]);
    assert.deepEqual(await valuesInForce(ledger), [1, 2, 4, 5, 30, 31, 100]);
    assert.deepEqual(await valuesInForce(ledger, "K09"), []);
    const active = await ledger.activeFiles("K07");
    assert.deepEqual(active.map((file) => file.name), ["cutback-2.csv", "cutback-3.csv", "cutback.csv"]);
    assert.equal(active[0]!.run, second.run);
    assert.equal(active[0]!.sha256, sha256("changed"));
  }));

Deno.test("two files of the same content are told apart when one of them changes", () =>
  withLedger(async (ledger) => {
    await commitFiles(ledger, "K07", [
      { name: "a.csv", text: "same", values: [1] },
      { name: "b.csv", text: "same", values: [2] },
    ]);
    await commitFiles(ledger, "K07", [{ name: "b.csv", text: "changed", values: [20] }]);
    assert.deepEqual(await valuesInForce(ledger), [1, 20]);
    // A column that the filter needs is not handed on unless it was asked for.
    const [part] = await ledger.readActive("cutback", "K07", { columns: ["value"] });
    assert.deepEqual(part!.table.schema.names, ["value"]);
    assert.deepEqual([...numbersOf(part!.table, "value")], [1]);
  }));

Deno.test("findRun() finds the run in force if it was made from the same, and none that was superseded", () =>
  withLedger(async (ledger) => {
    const shape = { x: "f64" } as const;
    const commit = (request: string, fingerprint: string) =>
      commitTable(ledger, { kind: "predict", table: "figures", lot: "K07", request, fingerprint }, shape, {
        x: [1],
      });
    const find = (request: string, fingerprint: string, lot = "K07") =>
      ledger.findRun({ kind: "predict", lot, request, fingerprint });
    const a = await commit("pairs", "first");
    assert.equal((await find("pairs", "first"))?.run, a.run);
    const b = await commit("pairs", "second");
    await commit("doubling", "first");
    assert.equal(await find("pairs", "first"), null);
    assert.equal((await find("pairs", "second"))?.run, b.run);
    assert.equal(await find("pairs", "second", "K08"), null);
    assert.equal(await find("tripling", "first"), null);
    assert.deepEqual((await ledger.runsInForce("predict")).map((run) => run.sequence), [2, 3]);
  }));

Deno.test("runs are numbered in the order of their commits, and each knows its parents", () =>
  withLedger(async (ledger) => {
    const first = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
    const second = await commitTable(
      ledger,
      { kind: "reduce", table: "traits", lot: "K07", parents: [first.run] },
      { x: "f64" },
      { x: [] },
    );
    assert.deepEqual((await ledger.runs()).map((run) => run.sequence), [1, 2]);
    assert.deepEqual(second.parents, [first.run]);
  }));

Deno.test("a run whose input was not staged is refused, and leaves nothing", () =>
  withLedger(async (ledger) => {
    const run = await ledger.begin("ingest");
    const input = { name: "a.csv", sha256: sha256("a"), rows: 0, accepted: 0, quarantined: 0 };
    await assert.rejects(
      run.commit({ lot: "K07", inputs: [input], parents: [], parameters: {}, modelVersion: "1" }),
      /input a\.csv was not staged/,
    );
    assert.deepEqual(await everythingIn(ledger.directory), [".lock", ".staging", "originals", "runs"]);
  }));

Deno.test("a manifest whose rows do not add up is refused", () =>
  withLedger(async (ledger) => {
    const run = await ledger.begin("ingest");
    const { sha256 } = await run.stageOriginal(bytes("a"));
    const input = { name: "a.csv", sha256, rows: 3, accepted: 1, quarantined: 1 };
    await assert.rejects(
      run.commit({ inputs: [input], parents: [], parameters: {}, modelVersion: "1" }),
      /accepted \+ quarantined must be rows/,
    );
    assert.deepEqual(await ledger.runs(), []);
  }));

Deno.test("a table source that fails in the middle leaves nothing, and the ledger goes on", () =>
  withLedger(async (ledger) => {
    const { tableSchema, columnsToBatches } = await import("../../../pipeline/ledger/columns.ts");
    const shape = { x: "f64" } as const;
    const batches = function* () {
      yield* columnsToBatches(shape, { x: [1, 2, 3] });
      throw new Error("the instrument's file ended early");
    };
    await assert.rejects(
      ledger.commit({
        kind: "ingest",
        inputs: [],
        parents: [],
        parameters: {},
        modelVersion: "1",
        originals: [await ledger.stageOriginal(bytes("a"))],
        tables: { x: { schema: tableSchema(shape), batches: batches() } },
      }),
      /ended early/,
    );
    assert.deepEqual(await everythingIn(ledger.directory), [".lock", ".staging", "originals", "runs"]);
    const run = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
    assert.equal(run.sequence, 1);
  }));

Deno.test("stageOriginal() takes a path, bytes and a stream, and names a file that is not there", () =>
  withLedger(async (ledger) => {
    const path = `${ledger.directory}/../some.csv`;
    await Deno.writeTextFile(path, "some text");
    const parts = ReadableStream.from([bytes("some "), bytes("text")]);
    for (const source of [path, bytes("some text"), parts]) {
      const staged = await ledger.stageOriginal(source);
      assert.deepEqual([staged.sha256, staged.bytes], [sha256("some text"), 9]);
      assert.equal(await Deno.readTextFile(staged.path), "some text");
    }
    await assert.rejects(ledger.stageOriginal(`${path}.not`), {
      name: "InputError",
      message: /some\.csv\.not/,
    });
    await assert.rejects(ledger.stageOriginal(ledger.directory), { name: "InputError" });
  }));

Deno.test("a damaged original is replaced when the same file is taken in again", () =>
  withLedger(async (ledger) => {
    await commitFiles(ledger, "K07", [{ name: "a.csv", text: "good", values: [1] }]);
    await Deno.writeTextFile(ledger.originalPath(sha256("good")), "evil");
    await commitFiles(ledger, "K07", [{ name: "b.csv", text: "good", values: [1] }]);
    assert.equal(await Deno.readTextFile(ledger.originalPath(sha256("good"))), "good");
  }));

Deno.test("a ledger opened for reading writes nothing and says so", () =>
  withLedger(async (ledger) => {
    await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
    await using reader = await openLedger(ledger.directory, { write: false });
    await assert.rejects(reader.begin("ingest"), /opened for reading/);
    assert.throws(() => reader.stageOriginal(bytes("a")), /opened for reading/);
  }));

Deno.test("unknown runs, tables and columns are named", () =>
  withLedger(async (ledger) => {
    const run = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
    await assert.rejects(ledger.readTable("000009-ingest-00000000", "cutback"), /Cannot find run 000009/);
    await assert.rejects(ledger.readTable(run, "modes"), /Cannot read table "modes".*found cutback/);
    await assert.rejects(ledger.readTable(run, "cutback", { columns: ["valu"] }), /column "valu".*value/);
    await assert.rejects(ledger.readActive("cutback", "K07", { columns: ["valu"] }), /column "valu".*value/);
    await assert.rejects(ledger.readTable(run, "cutback", { rowGroups: [1] }), /row group 1.*found 1/);
  }));
