// The pages of the demo's lots: what they say, and how they stand in a browser.
import { deepEqual, equal, match, ok } from "node:assert/strict";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { parse } from "csv-parse/sync";
import { parseHTML } from "linkedom";
import { writeDemo } from "../../../fixtures/write_demo.ts";
import { DemoFlags } from "../../../pipeline/commands/demo_flags.ts";
import { flagsOfLot } from "../../../pipeline/commands/flag.ts";
import { bringUpToDate } from "../../../pipeline/commands/predictions.ts";
import { ingestFolder } from "../../../pipeline/ingest/mod.ts";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { loadFacts, loadRules } from "../../../pipeline/query/flag/mod.ts";
import { reviewOf } from "../../../pipeline/query/review/build.ts";
import { sheetOf } from "../../../pipeline/query/review/sheet_data.ts";
import { findRequest } from "../../../pipeline/requests.ts";
import { reviewPage } from "../../../pipeline/review/page.ts";
import { sheetPage } from "../../../pipeline/review/sheet.ts";
import type { ReviewData, SheetData } from "../../../pipeline/review_types.ts";
import type { Printed, Visit } from "./browse.ts";

const ROOT = fileURLToPath(new URL("../../..", import.meta.url));
const BROWSER = "/usr/bin/chromium";
const REQUESTS = {
  T21: ["double-1550"],
  R08: ["heralded-1582", "cw-1582"],
  F14: ["double-1550-film"],
} as const;
const SHEETS = { R08: "R08-1/02", T21: "T21-1/06" } as const;

type Element = {
  readonly textContent: string;
  getAttribute(name: string): string | null;
  querySelector(selector: string): Element | null;
  querySelectorAll(selector: string): Iterable<Element>;
};
const dom = (page: string): Element => (parseHTML(page) as unknown as { document: Element }).document;

async function hasBrowser(): Promise<boolean> {
  try {
    return (await Deno.stat(BROWSER)).isFile;
  } catch {
    return false;
  }
}

Deno.test("the demo's lots: flagged, reviewed, and on pages that stand alone", async (t) => {
  const root = await Deno.makeTempDir({ prefix: "review-" });
  const reviews = new Map<string, ReviewData>();
  const pages = new Map<string, string>();
  const sheets = new Map<string, SheetData>();
  try {
    const lots = await writeDemo(join(root, "runs"));
    const ledgerDir = join(root, "ledger");
    {
      await using ledger = await openLedger(ledgerDir, { write: true });
      for (const { folder } of lots) await ingestFolder(folder, ledger);
    }
    for (const [lot, names] of Object.entries(REQUESTS)) {
      const requests = await Promise.all(names.map((n) => findRequest(n, join(ROOT, "fixtures/requests"))));
      await bringUpToDate({ ledger: ledgerDir, format: "table", workers: 2 }, [lot], requests, {
        quiet: true,
      });
    }
    await using ledger = await openLedger(ledgerDir, { write: false });
    const rules = await loadRules();
    for (const lot of Object.keys(REQUESTS)) {
      const found = await flagsOfLot(ledger, lot, null, rules, {});
      const data = await reviewOf(ledger, { ...found, rules });
      reviews.set(lot, data);
      pages.set(`${lot}.html`, reviewPage(data));
    }
    for (const [lot, die] of Object.entries(SHEETS)) {
      const facts = await loadFacts(ledger, lot, { requests: null, figures: [] });
      const data = await sheetOf(ledger, facts, die);
      sheets.set(lot, data);
      pages.set(`sheet-${lot}.html`, sheetPage(data));
    }
    for (const [name, text] of pages) await Deno.writeTextFile(join(root, name), text);

    await t.step(
      "planted faults are flagged and blamed on the right step, run or group; the good lot is quiet",
      async () => {
        const flags = new DemoFlags(ledger);
        for (const fault of lots.flatMap((l) => l.faults)) deepEqual(await flags.missed(fault), [], fault.id);
        const blamed = lots.flatMap((l) => l.faults).filter((f) => f.step !== undefined);
        equal(blamed.length, 2, "faults with a step");
        deepEqual(await flags.falseAlarms("F14"), []);
      },
    );

    await t.step("the first screen names yield, fault, step and dies", () => {
      const { answers } = reviews.get("R08")!;
      match(
        answers.how[1]!,
        /^heralded-1582: 6 of 16 dies accepted.*R08-1 6 of 8 \(35 to 97 %\), R08-2 0 of 8 \(0 to 37 %\)/,
      );
      match(answers.how.at(-1)!, /there is none of rb-ktp-zcut/);
      match(
        answers.out.join("\n"),
        /Wafer R08-2: duty cycle 0\.6.*\nCoating run C203: out facet turns back 38\.1 % at 1582 nm/,
      );
      match(answers.behind.join("\n"), /poling with recipe P5-long.*nothing else on record tells them apart/);
      match(
        answers.pay_off.join("\n"),
        /heralded-1582 loses 10 of 16 dies: 8 on wafer R08-2 \(poling with recipe P5-long\), 2 under coating run C203/,
      );
      match(answers.goes.join("\n"), /^heralded-1582: R08-1\/01, 02, 03, 07, 08, 10; best is R08-1\//m);
      match(
        answers.goes.join("\n"),
        /^cw-1582, read again before it is shipped: R08-1\/10\/g01, where a reading contradicts the others/m,
      );
      equal(
        answers.goes.some((line) => /best is R08-1\/10/.test(line)),
        false,
        "the doubted die is not the best",
      );
      match(
        answers.pay_off[1]!,
        /^heralded-1582: poling at target would bring 8 more dies \(14 instead of 6 of 16\)/,
      );
      const [first] = dom(pages.get("R08.html")!).querySelectorAll(".answers");
      for (const line of [...answers.how, ...answers.out, ...answers.pay_off, ...answers.goes]) {
        ok(first!.textContent.includes(line), line);
      }
    });

    await t.step("pages ask for nothing: no script, no address but data", () => {
      for (const [name, page] of pages) {
        ok(page.length < 1e6, `${name} has ${page.length} bytes`);
        ok(!/<script|javascript:|@import|\bon\w+=/i.test(page), name);
        const addresses = [...page.matchAll(/(?:href|src|action)="([^"]*)"|url\(([^)]*)\)/g)].map((m) =>
          m[1] ?? m[2]!
        );
        ok(addresses.every((a) => a.startsWith("#") || a.startsWith("data:")), name);
      }
    });

    await t.step("every picture has its table, and tables download with the numbers of the data", () => {
      for (const [lot, data] of reviews) {
        const page = dom(pages.get(`${lot}.html`)!);
        const pictures = [...page.querySelectorAll("figure")].length;
        ok(pictures >= 2 + data.requests.length * 3, `${pictures} pictures`);
        const files = new Map([...page.querySelectorAll("a[download]")].map((a) => {
          const text = decodeURIComponent(a.getAttribute("href")!.replace(/^[^,]*,/, ""));
          return [
            a.getAttribute("download")!,
            parse(text, { columns: true, bom: true }) as Record<string, string>[],
          ];
        }));
        for (const request of data.requests) {
          const ranked = files.get(`ranked-${lot}-${request.request}.csv`)!;
          deepEqual(
            ranked.map((r) => [r.die, Number(r.probability)]),
            request.ranked.map((d) => [d.die, d.probability]),
          );
          const decided = files.get(`decisions-${lot}-${request.request}.csv`)!;
          equal(decided.length, data.dies.length);
          const yields = files.get(`yield-${lot}-${request.request}.csv`)!;
          deepEqual(
            yields.filter((y) => y.scope === "wafer").map((
              y,
            ) => [y.id, Number(y.accepted), Number(y.exact_high), Number(y.score_low), Number(y.expected)]),
            request.wafers.map((w) => [w.wafer, w.good, w.exact.high, w.score.low, w.expected!.dies]),
          );
          const restored = files.get(`restored-${lot}-${request.request}.csv`)!;
          for (const gain of request.gains) {
            const own = restored.filter((row) => row.unit === gain.id);
            deepEqual(
              own.map((row) => row["at target"]),
              ["as made", ...gain.groups.map((g) => g.words), "all", "interaction"],
            );
            equal(Number(own.at(-2)!.accepted), gain.all_at_target);
            // The single rises and the interaction make the whole rise.
            const sum = gain.groups.reduce((total, g) => total + g.rise, gain.interaction);
            ok(Math.abs(sum - (gain.all_at_target - gain.as_made) / gain.dies) < 1e-12);
          }
          equal(request.gains.length, request.wafers.length > 1 ? 1 + request.wafers.length : 1);
          deepEqual(
            yields.filter((y) => y.scope === "group").map((y) => [y.id, Number(y.accepted), Number(y.dies)]),
            request.groups.map((g) => [g.group, g.good, g.of]),
          );
        }
        if (data.capabilities.length > 0) {
          deepEqual(
            files.get("capability.csv")!.map((row) => [row.unit, row.cpk === "" ? null : Number(row.cpk)]),
            data.capabilities.map((c) => [c.wafer ?? "lot", c.cpk?.value ?? null]),
          );
        }
        for (const trait of data.traits) {
          const rows = files.get(
            `${trait.key.replaceAll(/[^A-Za-z0-9]+/g, "-").replace(/-+$/, "")}-${lot}.csv`,
          )!;
          deepEqual(rows.map((r) => Number(r.value)), trait.dies.map((d) => d.value), trait.key);
        }
      }
    });

    await t.step("the maps hover with the decisions and values of the data", () => {
      for (const [lot, data] of reviews) {
        const titles = [...dom(pages.get(`${lot}.html`)!).querySelectorAll("svg title")].map((x) =>
          x.textContent
        );
        for (const request of data.requests) {
          for (const d of request.ranked.filter((r) => r.unavailable === null)) {
            ok(
              titles.some((x) => x.startsWith(`${d.die}: ${d.decision}, probability `)),
              `${d.die} ${d.decision}`,
            );
          }
          for (const w of request.wafers) {
            ok(titles.some((x) => x.startsWith(`${w.wafer}: ${w.good} of ${w.of}, `)), w.wafer);
          }
        }
        for (const trait of data.traits) {
          for (const d of trait.dies) {
            const value = String(Number(d.value.toPrecision(4))).replace("-", "−");
            ok(titles.some((x) => x.startsWith(`${d.die}: ${value} ± `)), `${trait.key} ${d.die} ${value}`);
          }
        }
      }
    });

    await t.step("the sheet says what to use, at what temperature, and what to beware of", () => {
      const text = dom(pages.get("sheet-R08.html")!).querySelector("body")!.textContent.replaceAll(
        /\s+/g,
        " ",
      );
      const [request] = sheets.get("R08")!.requests;
      match(text, new RegExp(`Guide ${request!.guide}, probability`));
      match(text, /oven at \d+(\.\d+)? ± /);
      match(text, /IEC 60825-1/);
      match(text, /poling on hv-2, recipe P5, /);
      match(text, /platform rb-ktp-zcut [0-9a-f]{16}/);
      equal(request!.budget.length, 6);
    });

    const browser = await hasBrowser();
    if (!browser && Deno.env.get("WAVELOT_NEEDS_BROWSER") === "1") {
      throw new Error(
        `Cannot test the pages in a browser: there is no ${BROWSER}, and WAVELOT_NEEDS_BROWSER asks for one`,
      );
    }
    await t.step({
      name: browser
        ? "in a browser"
        : `in a browser: skipped, there is no ${BROWSER} (apt-get install chromium)`,
      ignore: !browser,
      fn: async (t) => {
        const { code, stdout, stderr } = await new Deno.Command(Deno.execPath(), {
          args: [
            "run",
            "--quiet",
            "--frozen",
            "--allow-all",
            join(ROOT, "test/pipeline/review/browse.ts"),
            BROWSER,
            ...[...pages.keys()].map((n) => join(root, n)),
          ],
          cwd: ROOT,
          stdin: "null",
        }).output();
        equal(code, 0, new TextDecoder().decode(stderr));
        const { visits, printed } = JSON.parse(new TextDecoder().decode(stdout)) as {
          visits: Visit[];
          printed: Printed[];
        };
        equal(visits.length, 4 * pages.size);
        for (const v of visits) {
          const where = `${v.file.slice(root.length + 1)}, ${v.setting}`;
          await t.step(where, () => {
            deepEqual(v.consoleErrors, []);
            deepEqual(v.requests, []);
            ok(v.scrollWidth <= v.clientWidth, `the page is ${v.scrollWidth} px wide in ${v.clientWidth} px`);
            deepEqual(v.violations, []);
            ok(
              !/390/.test(v.setting) || v.titles.length === 0 || v.smallestText > 6,
              `text of ${v.smallestText} px`,
            );
          });
        }
        for (const { file, pages: count } of printed) {
          if (file.includes("sheet-")) equal(count, 1, `${file} prints on one page`);
          else ok(count >= 3 && count <= 12, `${file} prints on ${count} pages`);
        }
      },
    });
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});
