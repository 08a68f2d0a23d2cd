import { InputError } from "../../shared/errors.ts";
import type { Lot, TableKind } from "../../shared/schemas/lot.ts";
import { sha256 } from "../ledger/disk.ts";
import type { Ledger, PendingRun, RunInput, StagedOriginal } from "../ledger/types.ts";
import { type Coverage, coverageOf, type Covered } from "./coverage.ts";
import type { FileCounts, FileOutcome } from "./file_run.ts";
import { learnGuides, readGuides } from "./guides_file.ts";
import { type Held, heldCoverage } from "./held.ts";
import type { Remarks } from "./issues.ts";
import type { KnownIds } from "./known_ids.ts";
import { refuseUnknownDies, writeLot } from "./lot_file.ts";
import { readReadings } from "./readings_file.ts";
import { GUIDES_FILE, LOT_FILE, type ReadingFile } from "./run_folder.ts";
import { RunTables } from "./run_tables.ts";
import { fileStyle } from "./style.ts";
import { readWallsCsv } from "./walls_file.ts";
import { readWallsParquet } from "./walls_parquet.ts";

/** A file of the run folder, hashed. */
export interface Source {
  readonly name: string;
  readonly path: string;
  readonly sha256: string;
  /** Absent for lot.json and guides.csv. */
  readonly reading?: ReadingFile;
}

/** What `takeIn` works on. */
export interface Work {
  readonly ledger: Ledger;
  readonly run: PendingRun;
  readonly lot: Lot;
  readonly held: Held;
  /** All files of the folder: lot.json, guides.csv, readings by name. */
  readonly sources: readonly Source[];
  /** Those to be read, in the same order. */
  readonly take: readonly Source[];
  readonly known: KnownIds;
  readonly remarks: Remarks;
  readonly onFile: (file: string, done: number, of: number) => void;
}

/** Reads the files of a run, writes its tables and commits it. The caller discards the run when this throws. */
export async function takeIn(
  work: Work,
): Promise<{ run: string; files: readonly FileCounts[]; coverage: Coverage }> {
  const { run, lot, held, sources, take, known, remarks } = work;
  const tables = new RunTables(run);
  for (const table of ["quarantine", "remarks", "coverage"]) tables.declare(table);
  const inputs: RunInput[] = [];
  const files: FileOutcome[] = [];
  const full = take.some((source) => source.name === GUIDES_FILE);
  if (!full) await learnGuides(sources.find(({ name }) => name === GUIDES_FILE)!.path, lot, known);
  for (const [done, source] of take.entries()) {
    work.onFile(source.name, done, take.length);
    const { path, bytes } = await stage(run, source);
    if (source.name === LOT_FILE) {
      writeLot(lot, source, tables);
      inputs.push({ ...identity(source, "lot", bytes), rows: 0, accepted: 0, quarantined: 0 });
      continue;
    }
    const { covered, ...counts } = await readOne(path, source, work, tables);
    if (source.name === GUIDES_FILE) refuseUnknownDies(lot, known);
    if (counts.rows > 0 && counts.accepted === 0) {
      remarks.add(
        "nothing_accepted",
        source.name,
        `none of its ${counts.rows} rows can be used; see the quarantine`,
      );
    }
    const { kind, rows, accepted, quarantined } = counts;
    inputs.push({ ...identity(source, kind, bytes), rows, accepted, quarantined });
    files.push({ ...counts, covered });
  }
  const before = await heldCoverage(work.ledger, lot.lot, new Set(take.map((source) => source.name)));
  const coverage = coverageOf(lot, known, chained(before, files), remarks);
  writeRemarks(work, tables);
  await tables.finish();
  const parents = full ? [] : [...new Set([LOT_FILE, GUIDES_FILE].map((name) => held.files.get(name)!.run))];
  const manifest = await run.commit({
    lot: lot.lot,
    inputs,
    parents,
    parameters: { read: full ? "all files" : "new and changed files" },
    modelVersion: "none",
    fingerprint: sha256(JSON.stringify([lot.lot, inputs.map((i) => [i.name, i.sha256]), parents])),
  });
  return { run: manifest.run, files: files.map(({ covered: _, ...counts }) => counts), coverage };
}

const identity = (source: Source, kind: string, bytes: number) => ({
  name: source.name,
  kind,
  sha256: source.sha256,
  bytes,
});

function* chained(before: readonly Covered[], files: readonly FileOutcome[]): Iterable<Covered> {
  yield* before;
  for (const file of files) yield* file.covered;
}

function readOne(
  path: string,
  source: Source,
  { lot, known, remarks }: Work,
  tables: RunTables,
): Promise<FileOutcome> {
  const kind: TableKind = source.reading?.kind ?? "guides";
  const file = { lot: lot.lot, name: source.name, kind, sha256: source.sha256 };
  const style = fileStyle(lot, kind, source.name);
  if (kind === "guides") {
    tables.declare("guides");
    return readGuides(path, file, style, known, tables, remarks);
  }
  if (kind !== "walls") return readReadings(path, { ...file, kind }, style, known, tables, remarks);
  const readWalls = source.reading!.format === "csv" ? readWallsCsv : readWallsParquet;
  return readWalls(path, file, style, known, tables, remarks);
}

/** The copy that is kept is the one that is read; it has to be the file that was looked at before. */
async function stage(run: PendingRun, source: Source): Promise<StagedOriginal> {
  const staged = await run.stageOriginal(source.path);
  if (staged.sha256 === source.sha256) return staged;
  throw new InputError(`Cannot take in ${source.name}: it changed while it was read; try again`, {
    file: source.name,
  });
}

/** Remarks about a file that is no input of the run go to its first input: every row has a file of its run. */
function writeRemarks({ lot, take, remarks }: Work, tables: RunTables): void {
  for (const remark of remarks.list()) {
    const source = take.find(({ name }) => name === remark.file) ?? take[0]!;
    const statement = source.name === remark.file ? remark.statement : `${remark.file}: ${remark.statement}`;
    const line = source.name === remark.file ? remark.line ?? 1 : 1;
    tables.append("remarks", [lot.lot, source.name, source.sha256, line, remark.code, statement]);
  }
}
