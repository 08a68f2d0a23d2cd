import { join } from "node:path";
import { writeDemo } from "../../fixtures/write_demo.ts";
import { textTable, wrap } from "../console/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { ingestFolder } from "../ingest/mod.ts";
import { openLedger } from "../ledger/mod.ts";
import { loadPlatform } from "../platforms.ts";
import { loadRequests, requestFolders } from "../requests.ts";
import { note, print, threadsOf } from "./common.ts";
import { DemoChecks } from "./demo_checks.ts";
import { falseContradictions } from "./demo_contradictions.ts";
import { DemoFlags } from "./demo_flags.ts";
import { bringUpToDate, solvingProgress } from "./predictions.ts";
import { rankCommand } from "./rank.ts";

/** Which request shows which lot of the demo. */
const SHOWN = [
  { request: "double-1550", lot: "T21" },
  { request: "heralded-1582", lot: "R08" },
  { request: "double-1550-film", lot: "F14" },
] as const;

/** Makes the invented lots, runs the whole job on them and checks that every planted fault was found. Exit 1: one was not. */
export async function demoCommand(
  options: { readonly out: string; readonly workers?: number },
): Promise<0 | 1> {
  await refuseForeign(options.out);
  const runs = join(options.out, "runs");
  const ledgerDir = join(options.out, "ledger");
  print("An invented wafer facility, three lots. Nothing here was measured.\n");
  const lots = [];
  const rows = [];
  {
    await using ledger = await openLedger(ledgerDir, { write: true });
    lots.push(
      ...await writeDemo(runs, {
        ledger,
        workers: threadsOf(options),
        onSolving: solvingProgress("the demo"),
      }),
    );
    for (const { lot, platform, folder } of lots) {
      const result = await ingestFolder(folder, ledger, {
        checkLot: async (l) => void await loadPlatform(l.platform),
      });
      rows.push([
        lot,
        platform,
        result.files.length,
        result.rows,
        result.quarantined,
        result.already_held ? "held before" : "taken in",
      ]);
    }
  }
  const titles = ["lot", "platform", "files", "rows", "quarantined", "ingest"];
  print(textTable(titles.map((title) => ({ title })), rows, { width: 80 }));
  const folder = requestFolders()[1]!;
  const requests = await loadRequests(folder);
  const common = {
    ledger: ledgerDir,
    requests: folder,
    format: "table" as const,
    ...(options.workers === undefined ? {} : { workers: options.workers }),
  };
  const done = await bringUpToDate(common, lots.map((l) => l.lot), requests, { quiet: true });
  note(`${done.length} predictions: ${done.filter((d) => d.computed).length} computed now`);
  for (const { request, lot } of SHOWN) {
    print("");
    await rankCommand(request, { ...common, lot: [lot], top: 8 });
  }
  await using ledger = await openLedger(ledgerDir, { write: false });
  const faults = lots.flatMap((l) => l.faults);
  const checks = new DemoChecks(ledger, requests);
  const flags = new DemoFlags(ledger);
  const found: string[][] = [];
  for (const fault of faults) found.push([...await checks.missed(fault), ...await flags.missed(fault)]);
  print("\nPlanted faults");
  for (const [k, fault] of faults.entries()) {
    const missed = found[k]!;
    const lines = wrap(`${fault.lot} ${fault.unit}: ${fault.what}`, 70);
    print(`${missed.length === 0 ? "found " : "MISSED"}  ${lines.join("\n        ")}`);
    for (const line of missed) print(wrap(`not so: ${line}`, 70).map((l) => `          ${l}`).join("\n"));
  }
  const missed = found.filter((f) => f.length > 0).length;
  const alarms: string[] = [];
  for (const { lot } of lots.filter((l) => l.faults.length === 0)) {
    const own = [...await flags.falseAlarms(lot), ...await falseContradictions(ledger, lot)];
    alarms.push(...own);
    const lines = wrap(
      `${lot} was made without a fault: no alarm, and no reading contradicts the others`,
      70,
    );
    print(`${own.length === 0 ? "quiet " : "ALARM "}  ${lines.join("\n        ")}`);
    for (const line of own) print(wrap(`not so: ${line}`, 70).map((l) => `          ${l}`).join("\n"));
  }
  print(
    `\n${
      faults.length - missed
    } of ${faults.length} planted faults found. Try: wavelot trace R08-1/03 --figure heralding_signal --request heralded-1582 --ledger ${ledgerDir}`,
  );
  return missed + alarms.length === 0 ? 0 : 1;
}

/** A folder that holds something else than an earlier demo is left alone. */
async function refuseForeign(out: string): Promise<void> {
  let entries: string[];
  try {
    entries = (await Array.fromAsync(Deno.readDir(out))).map((e) => e.name);
  } catch (error) {
    if (error instanceof Deno.errors.NotFound) return;
    throw new InputError(`Cannot use ${out} for the demo: ${(error as Error).message}`, { file: out });
  }
  const foreign = entries.filter((name) => name !== "runs" && name !== "ledger");
  if (foreign.length > 0) {
    throw new InputError(
      `Cannot use ${out} for the demo: it holds ${foreign[0]}; name an empty or new folder with --out`,
      { file: out },
    );
  }
}
