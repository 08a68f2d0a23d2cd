import { join } from "node:path";
import { LedgerError } from "../../shared/errors.ts";
import { hashFile, namesIn, statOrNull } from "../ledger/disk.ts";
import { type Layout, layoutOf, MANIFEST_FILE, PENDING_PREFIX } from "../ledger/layout.ts";
import { LOCK_FILE } from "../ledger/lock.ts";
import { readManifest, runFolders } from "../ledger/runs.ts";
import type { Ledger, Manifest } from "../ledger/mod.ts";

export interface Finding {
  /** `damage`: something is not as it was written. `note`: nothing is lost, but it does not belong there. */
  readonly severity: "damage" | "note";
  /** Path within the ledger, with `/`. */
  readonly path: string;
  readonly statement: string;
}

export interface CheckResult {
  readonly findings: readonly Finding[];
  readonly runs: number;
  readonly originals: number;
  readonly tables: number;
  readonly bytes: number;
}

/** Reads every byte of a ledger and compares it with what the manifests state. It changes nothing. */
export async function checkLedger(
  ledger: Pick<Ledger, "directory">,
  onProgress: (done: number, of: number) => void = () => {},
): Promise<CheckResult> {
  const layout = layoutOf(ledger.directory);
  const findings: Finding[] = [];
  const report = (severity: Finding["severity"], path: string, statement: string) =>
    findings.push({ severity, path, statement });
  const folders = await runFolders(layout);
  const originals = await namesIn(layout.originals);
  const runs = await manifestsOf(layout, folders, report);
  reportSequence(runs, folders, report);
  reportParents(runs, report);
  await reportStrangers(layout, runs, folders, report);
  let [done, bytes, tables] = [0, 0, 0];
  const total = originals.length + runs.reduce((sum, run) => sum + Object.keys(run.tables).length, 0);
  for (const run of runs) {
    for (const { file, sha256, bytes: size } of Object.values(run.tables)) {
      bytes += await reportHash(layout, `runs/${run.run}/${file}`, sha256, size, report);
      tables++;
      onProgress(++done, total);
    }
  }
  for (const name of originals) {
    if (/^[0-9a-f]{64}$/.test(name)) {
      bytes += await reportHash(layout, `originals/${name}`, name, null, report);
    } else report("note", `originals/${name}`, "it is no original's name");
    onProgress(++done, total);
  }
  reportOriginals(runs, new Set(originals), report);
  return { findings, runs: folders.length, originals: originals.length, tables, bytes };
}

type Report = (severity: Finding["severity"], path: string, statement: string) => void;

async function manifestsOf(layout: Layout, folders: readonly string[], report: Report): Promise<Manifest[]> {
  const runs: Manifest[] = [];
  for (const folder of folders) {
    try {
      runs.push(await readManifest(layout, folder));
    } catch (error) {
      if (!(error instanceof LedgerError)) throw error;
      report("damage", `runs/${folder}/${MANIFEST_FILE}`, error.message);
    }
  }
  return runs;
}

/** Numbers run from 1 without a gap; the folder's name counts where the manifest can't be read. */
function reportSequence(runs: readonly Manifest[], folders: readonly string[], report: Report): void {
  const numbers = folders.map((folder) => Number.parseInt(folder));
  const last = Math.max(0, ...numbers, ...runs.map((run) => run.sequence));
  for (let number = 1; number <= last; number++) {
    const count = numbers.filter((n) => n === number).length;
    if (count === 0) report("damage", "runs", `run number ${number} is missing`);
    if (count > 1) report("damage", "runs", `run number ${number} is there ${count} times`);
  }
}

function reportParents(runs: readonly Manifest[], report: Report): void {
  const sequences = new Map(runs.map((run) => [run.run, run.sequence]));
  for (const run of runs) {
    for (const parent of run.parents) {
      const sequence = sequences.get(parent);
      if (sequence === undefined) {
        report("damage", `runs/${run.run}`, `its parent ${parent} is missing or damaged`);
      } else if (sequence >= run.sequence) {
        report("damage", `runs/${run.run}`, `its parent ${parent} is not older than itself`);
      }
    }
  }
}

async function reportHash(
  layout: Layout,
  path: string,
  sha256: string,
  bytes: number | null,
  report: Report,
): Promise<number> {
  const full = join(layout.root, path);
  if (await statOrNull(full) === null) {
    report("damage", path, "it is missing");
    return 0;
  }
  const found = await hashFile(full).catch((error: Error) => error);
  if (found instanceof Error) {
    report("damage", path, `it can't be read (${found.message})`);
    return 0;
  }
  if (found.sha256 !== sha256) {
    const size = bytes === null || bytes === found.bytes ? "" : ` and ${found.bytes} bytes of ${bytes}`;
    report("damage", path, `it was changed: its sha256 is ${found.sha256}${size}, it was ${sha256}`);
  }
  return found.bytes;
}

function reportOriginals(runs: readonly Manifest[], held: ReadonlySet<string>, report: Report): void {
  const named = new Set<string>();
  for (const run of runs) {
    for (const input of run.inputs) {
      if (!held.has(input.sha256) && !named.has(input.sha256)) {
        report(
          "damage",
          `originals/${input.sha256}`,
          `it is missing; run ${run.run} took it in as ${input.name}`,
        );
      }
      named.add(input.sha256);
    }
  }
  for (const name of held) {
    if (/^[0-9a-f]{64}$/.test(name) && !named.has(name)) {
      report("note", `originals/${name}`, "no run names it");
    }
  }
}

/** Files that nothing of the ledger accounts for. */
async function reportStrangers(
  layout: Layout,
  runs: readonly Manifest[],
  folders: readonly string[],
  report: Report,
): Promise<void> {
  for (const name of await namesIn(layout.root)) {
    if (!["originals", "runs", ".staging", LOCK_FILE].includes(name)) {
      report("note", name, "it is no part of a ledger");
    }
  }
  for (const name of await namesIn(layout.staging)) {
    report(
      "note",
      `.staging/${name}`,
      "a copy that a writer staged; the next write clears it, if that writer is gone",
    );
  }
  for (const name of await namesIn(layout.runs)) {
    if (folders.includes(name)) continue;
    const statement = name.startsWith(PENDING_PREFIX)
      ? "a run that was not finished; the next write clears it, if its writer is gone"
      : "it is no run's name";
    report("note", `runs/${name}`, statement);
  }
  for (const run of runs) {
    const known = [MANIFEST_FILE, ...Object.values(run.tables).map((table) => table.file)];
    for (const name of await namesIn(join(layout.runs, run.run))) {
      if (!known.includes(name)) report("note", `runs/${run.run}/${name}`, "the manifest does not name it");
    }
  }
}
