import { join } from "node:path";
import { writeDemo, type WrittenLot } from "../../fixtures/write_demo.ts";
import { type Cell, textTable, wrap } from "../console/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { ingestFolder } from "../ingest/mod.ts";
import { openLedger } from "../ledger/mod.ts";
import { loadPlatform } from "../platforms.ts";
import { type LoadedRequest, loadRequests, requestFolders } from "../requests.ts";
import { type CommonOptions, note, print, threadsOf } from "./common.ts";
import { DemoChecks } from "./demo_checks.ts";
import { falseContradictions } from "./demo_contradictions.ts";
import { DemoFlags } from "./demo_flags.ts";
import { laterRun, missedSettling, settledBy, settledText, takeLater } from "./demo_later.ts";
import { bringUpToDate, solvingProgress } from "./predictions.ts";
import { rankCommand } from "./rank.ts";

interface DemoOptions {
  readonly out: string;
  readonly workers?: number;
}

/** Which request shows which lot of the demo; lots with a later reading are shown after it. */
const SHOWN = [
  { request: "double-1550", lot: "T21" },
  { request: "heralded-1582", lot: "R08" },
  { request: "double-1550-film", lot: "F14" },
] as const;

/**
 * Makes the invented lots, runs the whole job on them and checks that every planted fault was found and that the die which
 * waits for a reading is settled by it. Exit 1: something was not so.
 */
export async function demoCommand(options: DemoOptions): Promise<0 | 1> {
  await refuseForeign(options.out);
  print("An invented wafer facility, three lots. Nothing here was measured.\n");
  const ledgerDir = join(options.out, "ledger");
  const lots = await makeAndTakeIn(options, ledgerDir);
  const folder = requestFolders()[1]!;
  const requests = await loadRequests(folder);
  const common: CommonOptions = {
    ledger: ledgerDir,
    requests: folder,
    format: "table",
    ...(options.workers === undefined ? {} : { workers: options.workers }),
  };
  await predictAll(common, lots, requests);
  const shown = (lot: WrittenLot) => SHOWN.filter((s) => s.lot === lot.lot);
  let missed = 0;
  for (const lot of lots.filter((l) => l.later === undefined)) await showRanking(common, shown(lot));
  for (const lot of lots.filter((l) => l.later !== undefined)) {
    missed += await settle(common, lot, requests);
    await showRanking(common, shown(lot));
  }
  missed += await checkFaults(ledgerDir, lots, requests);
  print(
    `Try: wavelot trace R08-1/03 --figure heralding_signal --request heralded-1582 --ledger ${ledgerDir}`,
  );
  return missed === 0 ? 0 : 1;
}

/** Writes the run folders and takes in all but the later readings. */
async function makeAndTakeIn(options: DemoOptions, ledgerDir: string): Promise<WrittenLot[]> {
  await using ledger = await openLedger(ledgerDir, { write: true });
  const lots = await writeDemo(join(options.out, "runs"), {
    ledger,
    workers: threadsOf(options),
    onSolving: solvingProgress("the demo"),
  });
  const rows: Cell[][] = [];
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
  const titles = ["lot", "platform", "files", "rows", "quarantined", "ingest"];
  print(textTable(titles.map((title) => ({ title })), rows, { width: 80 }));
  return lots;
}

/** Predicts every lot for every request; a lot whose later reading is held already was predicted before it came. */
async function predictAll(
  common: CommonOptions,
  lots: readonly WrittenLot[],
  requests: readonly LoadedRequest[],
): Promise<void> {
  const waiting: string[] = [];
  {
    await using ledger = await openLedger(common.ledger, { write: false });
    for (const { lot, later } of lots) {
      if (later === undefined || await laterRun(ledger, lot, later) === null) waiting.push(lot);
    }
  }
  const done = await bringUpToDate(common, waiting, requests, { quiet: true });
  note(`${done.length} predictions: ${done.filter((d) => d.computed).length} computed now`);
}

async function showRanking(
  common: CommonOptions,
  shown: readonly { readonly request: string; readonly lot: string }[],
): Promise<void> {
  for (const { request, lot } of shown) {
    print("\n");
    await rankCommand(request, { ...common, lot: [lot], top: 8 });
  }
}

/** Takes in the reading that a held die waits for and shows what came of it. Returns 1 when it is not as it should be. */
async function settle(
  common: CommonOptions,
  { lot, later, laterFolder }: WrittenLot,
  requests: readonly LoadedRequest[],
): Promise<number> {
  const request = requests.find((r) => r.name === later!.request)!;
  await takeLater(common.ledger, laterFolder!);
  await bringUpToDate(common, [lot], [request], { quiet: true });
  const settled = await settledBy(common.ledger, lot, later!, request);
  print("\nA die that waits for one reading");
  print(settledText(lot, later!, settled));
  const missed = missedSettling(later!, settled, request);
  print(
    `${
      missed.length === 0 ? "found " : "MISSED"
    }  The reading that rank named settles the die, as its truth has it`,
  );
  notSo(missed);
  return missed.length === 0 ? 0 : 1;
}

/** Prints what was found of every planted fault, and whether faultless lots are quiet. Returns how many are not as planted. */
async function checkFaults(
  ledgerDir: string,
  lots: readonly WrittenLot[],
  requests: readonly LoadedRequest[],
): Promise<number> {
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
    notSo(missed);
  }
  const missed = found.filter((f) => f.length > 0).length;
  let alarms = 0;
  for (const { lot } of lots.filter((l) => l.faults.length === 0)) {
    const own = [...await flags.falseAlarms(lot), ...await falseContradictions(ledger, lot)];
    const lines = wrap(
      `${lot} was made without a fault: no alarm, and no reading contradicts the others`,
      70,
    );
    print(`${own.length === 0 ? "quiet " : "ALARM "}  ${lines.join("\n        ")}`);
    notSo(own);
    alarms += own.length;
  }
  print(`\n${faults.length - missed} of ${faults.length} planted faults found.`);
  return missed + alarms;
}

function notSo(statements: readonly string[]): void {
  for (const s of statements) print(wrap(`not so: ${s}`, 70).map((l) => `          ${l}`).join("\n"));
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
