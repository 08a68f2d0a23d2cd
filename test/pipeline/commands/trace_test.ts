import assert from "node:assert/strict";
import { join } from "node:path";
import { parse } from "csv-parse/sync";
import { sharesText } from "../../../pipeline/commands/trace_text.ts";
import { sha256 } from "../../../pipeline/json_file.ts";
import { wavelot } from "../../run_wavelot.ts";
import { CUTBACK, tracedScene, WALLS } from "../query/traced_lot.ts";

Deno.test("trace answers as a tree, CSV and JSON, and changes nothing in the ledger", async () => {
  const { scene, requests } = await tracedScene();
  await using _ = scene;
  const ledger = join(scene.root, "ledger");
  const call = (...args: string[]) => wavelot([...args, "--ledger", ledger]);
  assert.equal((await call("ingest", scene.folder)).code, 0);

  const early = await call("trace", "K07-1/05", "--figure", "purity");
  assert.deepEqual([early.code, early.stdout], [2, ""]);
  assert.match(early.stderr, /run predict K07 first/);

  assert.equal((await call("predict", "K07", "--requests", requests)).code, 0);
  const runs = async () => (await Array.fromAsync(Deno.readDir(join(ledger, "runs")))).length;
  const before = await runs();
  const ask = (id: string, figure: string, ...more: string[]) =>
    call("trace", id, "--figure", figure, "--request", "pairs", "--requests", requests, ...more);

  const tree = await ask("K07-1/05/g01", "heralding_signal");
  assert.equal(tree.code, 0, tree.stderr);
  assert.equal(tree.stderr, "");
  assert.match(tree.stdout, /^heralding_signal of K07-1\/05\/g01 for pairs: 0\.\d+ ± /);
  assert.match(tree.stdout, /readings\/cutback\.csv:2 {2}insertion_loss_db 2\.9 \(u 0\.01\), length_mm 8/);
  assert.match(tree.stdout, /2\. poling, tool bench-1, voltage_v 900/);
  assert.match(tree.stdout, /out facet, run C1 \(coated again later: does not count\)/);
  assert.ok(tree.stdout.includes(sha256(CUTBACK)));
  for (const line of tree.stdout.split("\n")) assert.ok(line.length <= 80, line);

  const { code, stdout } = await ask("K07-1/06", "purity", "--format", "json");
  assert.equal(code, 0);
  const json = JSON.parse(stdout);
  assert.deepEqual([json.figure, json.request, json.die], ["purity", "pairs", "K07-1/06"]);
  assert.equal(typeof json.mean, "number");
  assert.match(json.run, /^\d{6}-predict-[0-9a-f]{8}$/);
  const readings = json.traits.flatMap((t: { measured: { readings: object[] }[]; readings: object[] }) => [
    ...t.measured.flatMap((m) => m.readings),
    ...t.readings,
  ]);
  assert.ok(readings.length > 0);
  for (const reading of readings) {
    for (const key of ["value", "u", "source_file", "file_name", "source_line"]) assert.ok(key in reading);
  }

  const csv = await ask("K07-1/06/g01", "purity", "--format", "csv");
  const rows = parse(csv.stdout, { columns: true }) as Record<string, string>[];
  const walls = rows.filter((row) => row.table === "walls");
  assert.deepEqual(walls.map((row) => [row.value, row.value_last, row.rows, row.source_line]), [
    [String(WALLS[0]), String(WALLS.at(-1)), String(WALLS.length), "2"],
  ]);
  // The pump's loss was read nowhere: its row is there all the same, with the platform's default.
  assert.deepEqual(
    rows.filter((row) => row.role === "pump_loss").map((row) => [row.basis, row.from, row.table, row.value]),
    [["platform", "bulk-ktp", "", ""]],
  );

  const none = await ask("K07-1/07/g03", "purity");
  assert.equal(none.code, 0);
  assert.match(none.stdout, /^purity of K07-1\/07\/g03 for pairs: none: /);
  assert.match(none.stdout, /├─ pump_loss/);

  await scene.write({ "readings/cutback.csv": CUTBACK.replace(",2.81,", ",2.85,") });
  assert.equal((await call("ingest", scene.folder)).code, 0);
  const old = await ask("K07-1/05/g01", "heralding_signal");
  assert.equal(old.stdout, tree.stdout);
  assert.match(old.stderr, /remark: the prediction is out of date: readings\/cutback\.csv/);
  assert.equal(await runs(), before + 1);
});

Deno.test("what a trait is made of is told largest part first, without parts below half a per cent", () => {
  const shares = { own: 0, die: 0.2, wafer: 0.703, lot: 0.004, other_lots: 0, platform: 0.093 };
  assert.equal(
    sharesText(shares),
    "made of readings of its wafer 70 %, readings of its die 20 %, the platform's default 9 %",
  );
});
