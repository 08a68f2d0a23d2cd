import { InputError } from "../../shared/errors.ts";
import type { Lot } from "../../shared/schemas/lot.ts";
import { hashFile } from "../ledger/disk.ts";
import type { Ledger } from "../ledger/types.ts";
import { type Coverage, coverageOf } from "./coverage.ts";
import type { FileCounts } from "./file_run.ts";
import { folderRemarks } from "./folder_remarks.ts";
import { learnGuides } from "./guides_file.ts";
import { type Held, heldCounts, heldCoverage, heldOf, refuseForeignWafers } from "./held.ts";
import { type Remark, Remarks } from "./issues.ts";
import { KnownIds } from "./known_ids.ts";
import { readLot } from "./lot_file.ts";
import { GUIDES_FILE, listRunFolder, LOT_FILE, type RunFolder } from "./run_folder.ts";
import { type Source, takeIn } from "./take_in.ts";

/** What happens to which file, how many files are done, and of how many. */
export interface IngestStep {
  readonly what: "hash" | "read";
  readonly file: string;
  readonly done: number;
  readonly of: number;
}

export interface IngestOptions {
  /** Asked once lot.json is read; throws what is wrong with it (a platform that nobody knows). */
  readonly checkLot?: (lot: Lot) => Promise<void>;
  /** Called before each file. */
  readonly onProgress?: (step: IngestStep) => void;
}

export interface IngestResult {
  /** Name of the run that holds the files; of the newest one when nothing was new. */
  readonly run: string;
  readonly lot: string;
  /** guides.csv and reading files of the run; all files in force when nothing was new. */
  readonly files: readonly FileCounts[];
  /** Sums over `files`. */
  readonly rows: number;
  readonly accepted: number;
  readonly quarantined: number;
  readonly already_held: boolean;
  readonly remarks: readonly Remark[];
  readonly coverage: Coverage;
}

/**
 * Takes a run folder into the ledger: one run with all files that are new or changed, or none when nothing is. When lot.json
 * or guides.csv changed all files are read again, as what columns and ids mean depends on them.
 * @param ledger open for writing
 * @throws InputError when a file cannot be used; nothing is written then
 */
export async function ingestFolder(
  folder: string,
  ledger: Ledger,
  options: IngestOptions = {},
): Promise<IngestResult> {
  const remarks = new Remarks();
  const listed = await listRunFolder(folder, remarks);
  const { lot, sha256 } = await readLot(listed.lotPath);
  await options.checkLot?.(lot);
  const sources = [{ name: LOT_FILE, path: listed.lotPath, sha256 }, ...await hashed(listed, options)];
  const held = await heldOf(ledger, lot.lot);
  const changed = sources.filter((source) => held.files.get(source.name)?.sha256 !== source.sha256);
  const full = changed.some(({ name }) => name === LOT_FILE || name === GUIDES_FILE);
  const take = full ? sources : changed;
  folderRemarks(lot, sources, held, remarks);
  const known = new KnownIds(lot.wafers.map((w) => w.wafer));
  if (take.length === 0) return await alreadyHeld(ledger, lot, held, listed.guidesPath, known, remarks);
  if (full) await refuseForeignWafers(ledger, lot.lot, known.wafers);
  const onFile = (file: string, done: number, of: number) =>
    options.onProgress?.({ what: "read", file, done, of });
  const run = await ledger.begin("ingest");
  try {
    const taken = await takeIn({ ledger, run, lot, held, sources, take, known, remarks, onFile });
    return resultOf(lot, taken, false, remarks);
  } catch (error) {
    await run.discard();
    throw error;
  }
}

async function hashed(listed: RunFolder, options: IngestOptions): Promise<Source[]> {
  const files: Omit<Source, "sha256">[] = [
    { name: GUIDES_FILE, path: listed.guidesPath },
    ...listed.readings.map((reading) => ({ name: reading.name, path: reading.path, reading })),
  ];
  const sources: Source[] = [];
  for (const [done, file] of files.entries()) {
    options.onProgress?.({ what: "hash", file: file.name, done, of: files.length });
    try {
      sources.push({ ...file, sha256: (await hashFile(file.path)).sha256 });
    } catch (cause) {
      throw new InputError(`Cannot read ${file.name}: ${(cause as Error).message}`, { file: file.name }, {
        cause,
      });
    }
  }
  return sources;
}

async function alreadyHeld(
  ledger: Ledger,
  lot: Lot,
  held: Held,
  guidesPath: string,
  known: KnownIds,
  remarks: Remarks,
): Promise<IngestResult> {
  await learnGuides(guidesPath, lot, known);
  const coverage = coverageOf(lot, known, await heldCoverage(ledger, lot.lot, new Set()), remarks);
  const names = new Set([...held.files.values()].map((file) => file.run));
  const newest = held.runs.filter((run) => names.has(run.run)).at(-1)!;
  const files = heldCounts(held).filter((file) => file.name !== LOT_FILE);
  return resultOf(lot, { run: newest.run, files, coverage }, true, remarks);
}

function resultOf(
  lot: Lot,
  { run, files, coverage }: { run: string; files: readonly FileCounts[]; coverage: Coverage },
  already_held: boolean,
  remarks: Remarks,
): IngestResult {
  const sum = (of: (file: FileCounts) => number) => files.reduce((n, file) => n + of(file), 0);
  return {
    run,
    lot: lot.lot,
    files,
    rows: sum((file) => file.rows),
    accepted: sum((file) => file.accepted),
    quarantined: sum((file) => file.quarantined),
    already_held,
    remarks: remarks.list(),
    coverage,
  };
}
