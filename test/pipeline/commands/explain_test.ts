import assert from "node:assert/strict";
import { join } from "node:path";
import { parse } from "csv-parse/sync";
import { wavelot } from "../../run_wavelot.ts";
import { tracedScene } from "../query/traced_lot.ts";

Deno.test("rank --explain says why a die is held and which reading would settle it; rank names that reading, too", async () => {
  const { scene, requests } = await tracedScene(["pairs"]);
  await using _ = scene;
  const ledger = join(scene.root, "ledger");
  const call = (...args: string[]) => wavelot([...args, "--ledger", ledger]);
  assert.equal((await call("ingest", scene.folder)).code, 0);
  // The limit at the median of what is known of die 07: half of its draws meet it.
  const pairs = JSON.parse(await Deno.readTextFile(join(requests, "pairs.json")));
  const ask = async (limit: number, ...more: string[]) => {
    pairs.require = [{ figure: "heralding_signal", at_least: limit }];
    await Deno.writeTextFile(join(requests, "pairs.json"), JSON.stringify(pairs));
    return await call("rank", "pairs", "--requests", requests, ...more);
  };
  const first = JSON.parse((await ask(0.3, "--format", "json")).stdout);
  const die = first.dies.find((d: { die: string }) => d.die === "K07-1/07");
  const limit = Number(die.figures.heralding_signal.mean.toFixed(4));

  const ranked = JSON.parse((await ask(limit, "--format", "json")).stdout);
  const held = ranked.dies.find((d: { die: string }) => d.die === "K07-1/07");
  assert.equal(held.decision, "hold");
  const table = await ask(limit);
  assert.match(table.stdout, /next reading of K07-1\/07\/g0\d/);

  const { code, stdout } = await ask(limit, "--explain", "K07-1/07", "--format", "json");
  assert.equal(code, 0);
  const json = JSON.parse(stdout);
  assert.deepEqual([json.guide, json.decision, json.probability], [held.guide, "hold", held.probability]);
  assert.deepEqual(json.next_readings[0], held.next_reading, "analysed again, the same to the bit");
  const [figure] = json.explanation.figures;
  assert.equal(figure.figure, "heralding_signal");
  assert.ok(Math.abs(figure.limits[0].margin_u) < 0.3, "the limit lies at the mean");
  assert.ok(Math.abs(figure.uLinear / figure.u - 1) < 0.25, `${figure.uLinear} beside ${figure.u}`);
  const shares = json.traits.map((t: { shares: Record<string, number | null> }) =>
    t.shares.heralding_signal ?? 0
  );
  const sum = shares.reduce((a: number, b: number) => a + b, 0);
  assert.ok(sum > 0.7 && sum < 1.2, String(sum));
  assert.deepEqual(json.restored.map((r: { group: string }) => r.group), [
    "loss",
    "mode_size",
    "facet",
    "poling",
    "phase_matching",
    "all",
  ]);

  const text = await ask(limit, "--explain", held.guide);
  assert.match(text.stdout, /^K07-1\/07\/g0\d for pairs: hold\n/);
  assert.match(text.stdout, /u (in|out)side the limit/);
  assert.match(text.stdout, /mfd_x_um s 1582 TE/);
  assert.match(text.stdout, /As made 0\.\d+; with traits at their targets/);
  for (const line of text.stdout.split("\n")) assert.ok(line.length <= 80, line);

  const csv = await ask(limit, "--explain", held.guide, "--format", "csv");
  const rows = parse(csv.stdout, { columns: true }) as Record<string, string>[];
  assert.equal(rows.length, json.traits.length);

  const unknown = await ask(limit, "--explain", "K07-1/99");
  assert.deepEqual([unknown.code, unknown.stdout], [2, ""]);
});
