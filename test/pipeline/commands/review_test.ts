// flag, review and sheet as a user calls them: exit codes, streams, files.
import { deepEqual, equal, match, ok } from "node:assert/strict";
import { join } from "node:path";
import { parse } from "csv-parse/sync";
import { refractiveIndex } from "../../../models/materials/mod.ts";
import type { Flag } from "../../../pipeline/query/flag/mod.ts";
import type { ReviewData, SheetData } from "../../../pipeline/review_types.ts";
import * as lot from "../../run_folder.ts";
import { wavelot } from "../../run_wavelot.ts";

const bare = (nm: number, pol: "TE" | "TM") => {
  const n = refractiveIndex("KTP", pol === "TE" ? "y" : "z", nm * 1e-9, 25);
  return ((n - 1) / (n + 1)) ** 2;
};

Deno.test("flag, review and sheet from the command line", async (t) => {
  const root = await Deno.makeTempDir({ prefix: "flag-" });
  const call = (...args: string[]) => wavelot([...args, "--requests", "requests", "--workers", "2"], root);
  try {
    await lot.writeFiles(join(root, "Z09"), lot.runFiles(bare));
    const { open, double } = lot.REQUESTS;
    await lot.writeRequests(join(root, "requests"), { open, double });
    equal((await wavelot(["ingest", "Z09"], root)).code, 1);

    await t.step("flag computes what is missing, exits 1, and prints flags as the format says", async () => {
      const { code, stdout, stderr } = await call("flag", "Z09", "--format", "json");
      equal(code, 1, stderr);
      const { flags } = JSON.parse(stdout) as { flags: Flag[] };
      ok(flags.length > 2);
      for (const f of flags) {
        ok(
          ["lot", "wafer", "coating_run"].includes(f.scope) && ["act", "watch", "note"].includes(f.severity),
          f.rule,
        );
        for (const r of f.evidence.readings) {
          ok(r.lines.length > 0 && r.lines.every(([a, b]) => a >= 1 && b >= a), `${f.rule} ${r.file_name}`);
          match(r.source_file, /^[0-9a-f]{64}$/, `${f.rule} ${r.file_name}`);
        }
        for (const s of f.suspects) {
          ok(s.p_value >= 0 && s.p_value <= 1 && "step" in s && "tool" in s && "recipe" in s);
        }
      }
      const aside = flags.find((f) => f.rule === "rows-aside")!;
      match(aside.statement, /4 of 400 rows could not be used/);
      const refused = flags.find((f) => f.rule === "reading-doubted" && /fringe contrast/.test(f.statement))!;
      equal(refused.severity, "watch");
      // The line that the evidence names is the line that says it.
      const [ref] = refused.evidence.readings;
      const line = (await Deno.readTextFile(join(root, "Z09", ref!.file_name))).split(
        "\n",
      )[ref!.lines[0]![0] - 1]!;
      match(line, /0\.9/);
      const again = await call("flag", "--format", "csv");
      equal(again.code, 1);
      equal((parse(again.stdout, { columns: true }) as unknown[]).length, flags.length);
      for (const row of (await call("flag")).stdout.split("\n")) ok([...row].length <= 80, row);
    });

    await t.step("only notes: exit 0", async () => {
      const silent = JSON.parse(
        await Deno.readTextFile(new URL("../../../pipeline/query/flag_rules.json", import.meta.url)),
      );
      for (const r of silent.rules) if (r.rule !== "rows-aside") r.off = true;
      silent.rules = silent.rules.filter((r: { rule: string }) => r.rule !== "rows-aside");
      silent.rules.push({ rule: "rows-aside", kind: "quarantine", watch_above_share: 1, severity: "note" });
      await lot.writeFiles(root, { "notes.json": JSON.stringify(silent) });
      const { code, stdout } = await call("flag", "Z09", "--rules", "notes.json", "--format", "json");
      deepEqual((JSON.parse(stdout) as { flags: Flag[] }).flags.map((f) => [f.rule, f.severity]), [[
        "rows-aside",
        "note",
      ]]);
      equal(code, 0);
    });

    await t.step("review writes one page, its content as JSON, its yields as CSV", async () => {
      const page = await call("review", "Z09", "--request", "double", "--out", "Z09.html");
      equal(page.code, 1, page.stderr);
      match(page.stderr, /Z09\.html: 0\.\d\d MB, opens in any browser/);
      const html = await Deno.readTextFile(join(root, "Z09.html"));
      match(html, /<title>Review of lot Z09<\/title>/);
      const json = await call("review", "Z09", "--format", "json");
      const data = JSON.parse(json.stdout) as ReviewData;
      deepEqual(data.requests.map((r) => r.request), ["double", "open"]);
      equal(data.counts.guides, lot.GUIDE_IDS.length);
      equal(data.counts.quarantined, 4);
      const csv = await call("review", "Z09", "--format", "csv");
      const rows = parse(csv.stdout, { columns: true }) as Record<string, string>[];
      for (const r of data.requests) {
        const own = rows.find((row) => row.request === r.request && row.scope === "lot")!;
        deepEqual([Number(own.accepted), Number(own.dies), Number(own.high)], [
          r.total.good,
          r.total.of,
          r.total.high,
        ]);
      }
    });

    await t.step("sheet writes the page of a die", async () => {
      const { code, stderr } = await call("sheet", "Z09-1/02", "--out", "die.html");
      equal(code, 0, stderr);
      match(await Deno.readTextFile(join(root, "die.html")), /<title>Die Z09-1\/02<\/title>/);
      const data = JSON.parse((await call("sheet", "Z09-1/02", "--format", "json")).stdout) as SheetData;
      deepEqual(data.steps, [{ step: "poling", tool: "bench-1", recipe: "P4", finished: null }]);
      ok(data.readings.every((r) => r.readings.length > 0));
      equal(data.provenance.requests.length, 2);
    });

    await t.step("calls that can't be: exit 2, and what would be right", async () => {
      const cases: [string[], RegExp][] = [
        [["review", "Z09"], /need --out FILE for the page, or --format json or csv/],
        [["review", "Z99", "--out", "x.html"], /Unknown lot "Z99"/],
        [["review", "Z09", "--out", "nowhere/x.html"], /there is no folder nowhere/],
        [["sheet", "Z09-1/02/g1", "--out", "x.html"], /need a die/],
        [["sheet", "Z09-1/2", "--out", "x.html"], /Unknown die/],
        [
          ["flag", "Z09", "--rules", "missing.json"],
          /Cannot read rules missing\.json: there is no such file/,
        ],
        [["flag", "--request", "nothing"], /Unknown request "nothing"/],
      ];
      for (const [args, why] of cases) {
        const { code, stderr } = await call(...args);
        equal(code, 2, `${args.join(" ")}: ${stderr}`);
        match(stderr, why);
      }
    });
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});
