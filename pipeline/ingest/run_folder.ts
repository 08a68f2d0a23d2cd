import { join } from "node:path";
import { InputError, quoteValue } from "../../shared/errors.ts";
import { didYouMean, nearestWord } from "../../shared/schemas/nearest.ts";
import { kindOfStem, READING_KINDS, type ReadingKind } from "../../shared/schemas/readings.ts";
import type { Remarks } from "./issues.ts";

/** A file of readings. */
export interface ReadingFile {
  /** Path within the run folder, `readings/cutback.csv`. */
  readonly name: string;
  readonly path: string;
  readonly kind: ReadingKind;
  readonly format: "csv" | "parquet";
}

/** What a run folder holds. */
export interface RunFolder {
  readonly lotPath: string;
  readonly guidesPath: string;
  readonly readings: readonly ReadingFile[];
}

export const LOT_FILE = "lot.json";
export const GUIDES_FILE = "guides.csv";

/** Lists a run folder. @throws InputError when it is none, or holds a reading file that cannot be told or read */
export async function listRunFolder(folder: string, remarks: Remarks): Promise<RunFolder> {
  const entries = await names(folder, "run folder");
  if (!entries.includes(LOT_FILE)) {
    const near = nearestWord(LOT_FILE, entries);
    throw new InputError(
      `Cannot take in ${folder}: it has no ${LOT_FILE}${
        didYouMean(near)
      }; need a run folder with ${LOT_FILE}, ${GUIDES_FILE} and readings/`,
      { file: join(folder, LOT_FILE) },
    );
  }
  if (!entries.includes(GUIDES_FILE)) {
    throw new InputError(
      `Cannot take in ${folder}: it has no ${GUIDES_FILE}${
        didYouMean(nearestWord(GUIDES_FILE, entries))
      }, the list of all dies and guides as designed`,
      { file: join(folder, GUIDES_FILE) },
    );
  }
  const readings: ReadingFile[] = [];
  if (!entries.includes("readings")) {
    remarks.add(
      "no_readings",
      LOT_FILE,
      "the run folder has no folder readings/; only the design is taken in",
    );
  } else {
    for (const file of await names(join(folder, "readings"), "folder")) {
      const found = await readingFile(join(folder, "readings"), file, remarks);
      if (found !== null) readings.push(found);
    }
  }
  const outside = entries.filter((name) => /\.(csv|parquet)$/i.test(name) && name !== GUIDES_FILE);
  for (const name of outside) {
    remarks.add("ignored_file", name, `not read: files of readings belong into readings/`);
  }
  return { lotPath: join(folder, LOT_FILE), guidesPath: join(folder, GUIDES_FILE), readings };
}

async function readingFile(folder: string, file: string, remarks: Remarks): Promise<ReadingFile | null> {
  const name = `readings/${file}`;
  const path = join(folder, file);
  if (/\p{Cc}/u.test(file)) {
    throw new InputError(
      `Cannot read ${quoteValue(name)}: its name holds control characters; need a plain name`,
    );
  }
  const info = await Deno.stat(path).catch((cause) => {
    throw new InputError(`Cannot read ${name}: ${cause.message}`, { file: name }, { cause });
  });
  const extension = /\.(csv|parquet)$/.exec(file)?.[1] as "csv" | "parquet" | undefined;
  if (!info.isFile || file.startsWith(".") || extension === undefined) {
    const why = !info.isFile
      ? "it is no file; files of readings stand directly in readings/"
      : file.startsWith(".")
      ? "it is hidden"
      : "its name ends neither in .csv nor in .parquet";
    remarks.add("ignored_file", name, `not read: ${why}`);
    return null;
  }
  const stem = file.slice(0, -extension.length - 1);
  const kind = kindOfStem(stem);
  if (kind === null) {
    const near = nearestWord(stem.split(/[-_ .]/, 1)[0]!, READING_KINDS);
    throw new InputError(
      `Cannot read ${name}: its name begins with no kind of reading${didYouMean(near)}; ` +
        `need one of ${READING_KINDS.join(", ")}, alone or before a hyphen as in ${near ?? "cutback"}-2.csv`,
      { file: name, value: stem },
    );
  }
  if (extension === "parquet" && kind !== "walls") {
    throw new InputError(`Cannot read ${name}: Parquet is for walls only; write ${kind} as CSV`, {
      file: name,
    });
  }
  return { name, path, kind, format: extension };
}

async function names(folder: string, what: string): Promise<string[]> {
  try {
    const list: string[] = [];
    for await (const entry of Deno.readDir(folder)) list.push(entry.name);
    return list.sort(); // the order of a folder differs from system to system
  } catch (cause) {
    const why = cause instanceof Deno.errors.NotFound
      ? "there is no such folder"
      : cause instanceof Deno.errors.NotADirectory
      ? "it is a file, need a folder"
      : (cause as Error).message;
    throw new InputError(`Cannot read ${what} ${folder}: ${why}`, { file: folder }, { cause });
  }
}
