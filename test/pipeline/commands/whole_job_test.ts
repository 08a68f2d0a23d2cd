// The command line as a user has it: own process, the task's own permissions, a folder of files in, answers out.
import { deepEqual, equal, match, notEqual, ok } from "node:assert/strict";
import { join } from "node:path";
import { parse } from "csv-parse/sync";
import stringWidth from "string-width";
import { refractiveIndex } from "../../../models/materials/mod.ts";
import type { Manifest } from "../../../pipeline/ledger/mod.ts";
import type { Ranking } from "../../../pipeline/query/rank.ts";
import { FIGURES } from "../../../shared/schemas/figures.ts";
import * as lot from "../../run_folder.ts";
import { wavelot } from "../../run_wavelot.ts";

const bare = (nm: number, pol: "TE" | "TM") => {
  const n = refractiveIndex("KTP", pol === "TE" ? "y" : "z", nm * 1e-9, 25);
  return ((n - 1) / (n + 1)) ** 2;
};

/** Manifests of a ledger, in order. */
async function manifests(ledger: string): Promise<Manifest[]> {
  const names: string[] = [];
  for await (const { name } of Deno.readDir(join(ledger, "runs"))) names.push(name);
  const read = (name: string) => Deno.readTextFile(join(ledger, "runs", name, "manifest.json"));
  return (await Promise.all(names.sort().map(read))).map((text) => JSON.parse(text));
}

/** Hashes of every table of predictions: equal hashes are equal bytes. */
const predicted = (runs: readonly Manifest[]) =>
  runs.filter((r) => r.kind === "predict").map((r) => [
    (r.parameters as { request: string }).request,
    Object.entries(r.tables).map(([name, t]) => [name, t.sha256]),
  ]);

Deno.test("ingest, predict, rank, sql and check, and everything once more", async (t) => {
  const root = await Deno.makeTempDir({ prefix: "job-" });
  const ledger = join(root, "ledger");
  const call = (...args: string[]) => wavelot(args, root);
  const requests = ["--requests", "requests"];
  try {
    await lot.writeFiles(join(root, "Z09"), lot.runFiles(bare));
    const { open, filtered, double } = lot.REQUESTS;
    await lot.writeRequests(join(root, "requests"), { open, filtered, double });

    await t.step("ingest: exit 1 for quarantined rows, and says where to see them", async () => {
      const { code, stdout, stderr } = await call("ingest", "Z09");
      equal(code, 1);
      match(stderr, /4 of 400 rows are quarantined: wavelot sql/);
      match(stdout, /^Lot Z09: taken in as 000001-ingest-/);
      for (const line of stdout.split("\n")) ok(stringWidth(line) <= 80, line);
    });

    await t.step("predict: computes once; not again", async () => {
      const first = await call("predict", ...requests, "--format", "json", "--workers", "2");
      equal(first.code, 0, first.stderr);
      match(first.stderr, /Computed 3 of 3 predictions/);
      match(first.stderr, /Z09-1\/02\/g1: wall list incomplete: 1 of its rows is quarantined/);
      match(first.stderr, /fringe contrast 0.9 above/);
      const before = await manifests(ledger);
      const again = await call("predict", "Z09", ...requests, "--format", "json", "--workers", "1");
      equal(again.code, 0);
      match(again.stderr, /nothing was computed/);
      deepEqual(await manifests(ledger), before);
      const runs = (text: string) => JSON.parse(text).predictions.map((p: { run: string }) => p.run);
      deepEqual(runs(again.stdout), runs(first.stdout));
      deepEqual(before.map((r) => r.kind), ["ingest", "reduce", "predict", "predict", "predict"]);
    });

    let json = "";
    let ranking!: Ranking;
    await t.step(
      "rank as JSON: every figure of every die, unavailable dies last and never accepted",
      async () => {
        const { code, stdout, stderr } = await call("rank", "filtered", ...requests, "--format", "json");
        equal(code, 0, stderr);
        json = stdout;
        ranking = JSON.parse(stdout);
        equal(ranking.request, "filtered");
        deepEqual(ranking.lots, ["Z09"]);
        equal(ranking.guides_considered, 7);
        deepEqual(ranking.dies.map((d) => d.die).sort(), ["Z09-1/01", "Z09-1/02", "Z09-1/03"]);
        for (const die of ranking.dies) deepEqual(Object.keys(die.figures), [...FIGURES]);
        const cut = ranking.dies.at(-1)!;
        deepEqual([cut.die, cut.decision, cut.qualifying_guides], ["Z09-1/03", "reject", 0]);
        equal(cut.probability, 1, "it would do, were it not cut");
        match(cut.unavailable!, /cut back to 4 mm of 8 mm/);
        const probabilities = ranking.dies.slice(0, -1).map((d) => d.probability);
        deepEqual(probabilities, [...probabilities].sort((a, b) => b - a));
        for (const { figures } of ranking.dies) {
          equal(figures.pair_rate_hz.mean, null);
          match(figures.pair_rate_hz.reason!, /continuous-wave/);
          equal(typeof figures.heralding_signal.probability, "number");
          equal(figures.heralding_idler.probability, null, "no requirement, no probability");
        }
      },
    );

    await t.step("rank as CSV says what the JSON says", async () => {
      const { stdout } = await call("rank", "filtered", ...requests, "--format", "csv", "--top", "2");
      const rows: Record<string, string>[] = parse(stdout, { columns: true });
      equal(rows.length, 2);
      rows.forEach((row, k) => {
        const die = ranking.dies[k]!;
        equal(row.die, die.die);
        equal(row.decision, die.decision);
        for (const figure of FIGURES) {
          const { mean, basis } = die.figures[figure];
          equal(row[`${figure}.mean`], mean === null ? "" : String(mean), figure);
          equal(row[`${figure}.basis`], basis);
        }
      });
    });

    await t.step("rank as a table: 80 columns, the budget, and what is measured", async () => {
      const { stdout, stderr } = await call("rank", "filtered", ...requests, "--all-guides");
      const table = stdout.split("\n");
      const rows = table.filter((line) => /^Z09-1\/\d+\/g\d/.test(line));
      equal(rows.length, 7);
      for (const line of table) ok(stringWidth(line) <= 80, line);
      match(stdout, /IEC 60825-1/);
      match(stdout, /survival/);
      match(stderr, /beyond_published_range/);
      ok(rows.at(-1)!.includes("reject"));
      // Guides with the same probability stand in the natural order of their ids.
      const best = rows.filter((line) => / accept /.test(line)).map((line) => line.split(" ", 1)[0]);
      deepEqual(best, ["Z09-1/01/g1", "Z09-1/01/g2", "Z09-1/02/g1", "Z09-1/02/g2"]);
    });

    await t.step("sql reads and only reads; check finds all hashes right", async () => {
      const { code, stdout } = await call(
        "sql",
        "SELECT file_name, source_line, value FROM quarantine ORDER BY ALL",
        "--format",
        "json",
      );
      equal(code, 0);
      deepEqual(
        JSON.parse(stdout).map((r: Record<string, unknown>) => [r.file_name, r.source_line, r.value]),
        [
          ["readings/cutback.csv", 11, "NaN"],
          ["readings/cutback.csv", 12, "3"],
          ["readings/fringes.csv", 18, "g7"],
          ["readings/walls.csv", 346, "9000"],
        ],
      );
      const drop = await call("sql", "DROP TABLE quarantine");
      deepEqual([drop.code, drop.stdout], [2, ""]);
      match(drop.stderr, /need a statement that reads/);
      const check = await call("check");
      equal(check.code, 0);
      match(check.stderr, /all hashes hold/);
    });

    await t.step("the same folder again adds nothing and says so", async () => {
      const before = await manifests(ledger);
      const again = await call("ingest", "Z09", "--format", "json");
      equal(again.code, 1, "its rows are quarantined still");
      const result = JSON.parse(again.stdout);
      equal(result.already_held, true);
      equal(result.accepted + result.quarantined, result.rows);
      deepEqual(await manifests(ledger), before);
    });

    await t.step("another ledger from the same files and one thread: the same bytes", async () => {
      equal((await call("ingest", "Z09", "--ledger", "other")).code, 1);
      const predict = await call("predict", ...requests, "--ledger", "other", "--workers", "1");
      equal(predict.code, 0, predict.stderr);
      deepEqual(predicted(await manifests(join(root, "other"))), predicted(await manifests(ledger)));
    });

    await t.step("a changed file supersedes the old one, and what rests on it moves", async () => {
      const modes = lot.runFiles(bare)["readings/modes.csv"]!.replace(
        "Z09-1,02,g1,1582,TE,8.8,",
        "Z09-1,02,g1,1582,TE,4.4,",
      );
      await lot.writeFiles(join(root, "Z09"), { "readings/modes.csv": modes });
      const ingest = await call("ingest", "Z09", "--format", "json");
      equal(JSON.parse(ingest.stdout).already_held, false);
      // Without --all-guides: die 02 may now be represented by another of its guides.
      const { stdout, stderr } = await call(
        "rank",
        "filtered",
        ...requests,
        "--format",
        "json",
        "--all-guides",
      );
      const now = (JSON.parse(stdout) as Ranking).dies.find((d) => d.guide === "Z09-1/02/g1")!.figures;
      const then = ranking.dies.find((d) => d.guide === "Z09-1/02/g1")!.figures;
      // 4.4 instead of 8.8 µm against 10.4 µm: 0.717 instead of 0.986 along x.
      const x = (size: number) => 2 * size * 10.4 / (size ** 2 + 10.4 ** 2);
      const ratio = now.coupling_signal.mean! / then.coupling_signal.mean!;
      ok(Math.abs(ratio / (x(4.4) / x(8.8)) - 1) < 0.002, `coupling ${ratio}`);
      deepEqual(now.coupling_idler, then.coupling_idler);
      deepEqual(now.survival_signal, then.survival_signal);
      deepEqual(now.purity, then.purity);
      notEqual(stdout, json, stderr);
      const kinds = (await manifests(ledger)).map((r) => r.kind);
      equal(kinds.filter((k) => k === "ingest").length, 2, "both takings-in stay");
      equal(kinds.filter((k) => k === "predict").length, 4, "only the request that was ranked is new");
    });

    await t.step("a byte that changed in the ledger: check exits 3 and names the file", async () => {
      const run = (await manifests(ledger)).find((r) => r.kind === "reduce")!;
      const path = join(ledger, "runs", run.run, "traits.parquet");
      const bytes = await Deno.readFile(path);
      bytes[200]! ^= 1;
      await Deno.writeFile(path, bytes);
      const { code, stdout, stderr } = await call("check", "--format", "json");
      equal(code, 3);
      ok(stdout.includes("traits.parquet"));
      match(stderr, /damaged/);
    });
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});
