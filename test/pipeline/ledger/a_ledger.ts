// Helpers of the ledger's tests: a ledger in a folder of its own, and small runs.
import {
  type Columns,
  type Ledger,
  type Manifest,
  openLedger,
  type StagedOriginal,
  type TableShape,
  tableStream,
} from "../../../pipeline/ledger/mod.ts";

export const bytes = (text: string): Uint8Array => new TextEncoder().encode(text);

/** Calls `use` with a folder that is gone afterwards. */
export async function withFolder(use: (folder: string) => Promise<void>): Promise<void> {
  const folder = await Deno.makeTempDir({ prefix: "wavelot-test-" });
  try {
    await use(folder);
  } finally {
    await Deno.remove(folder, { recursive: true });
  }
}

/** Calls `use` with a ledger opened for writing. */
export const withLedger = (use: (ledger: Ledger) => Promise<void>): Promise<void> =>
  withFolder(async (folder) => {
    await using ledger = await openLedger(`${folder}/ledger`, { write: true });
    await use(ledger);
  });

export interface FileOfRun {
  readonly name: string;
  readonly text: string;
  readonly values: readonly number[];
}

/** Commits an ingest run that took in files of one column, `value`, as kind `cutback`. */
export async function commitFiles(
  ledger: Ledger,
  lot: string,
  files: readonly FileOfRun[],
): Promise<Manifest> {
  const originals: StagedOriginal[] = [];
  for (const file of files) originals.push(await ledger.stageOriginal(bytes(file.text)));
  const rows = files.flatMap((file, i) =>
    file.values.map((value, k) => ({ value, name: file.name, hash: originals[i]!.sha256, line: k + 2 }))
  );
  const shape = {
    lot: "text",
    file_name: "text",
    source_file: "text",
    source_line: "i32",
    value: "f64",
  } as const;
  return await ledger.commit({
    kind: "ingest",
    lot,
    inputs: files.map((file, i) => ({
      name: file.name,
      kind: "cutback",
      sha256: originals[i]!.sha256,
      rows: file.values.length,
      accepted: file.values.length,
      quarantined: 0,
    })),
    parents: [],
    parameters: {},
    modelVersion: "1",
    originals,
    tables: {
      cutback: tableStream(shape, {
        lot: rows.map(() => lot),
        file_name: rows.map((row) => row.name),
        source_file: rows.map((row) => row.hash),
        source_line: rows.map((row) => row.line),
        value: rows.map((row) => row.value),
      }),
    },
  });
}

/** Commits a run that was computed: one table, no files. */
export const commitTable = <S extends TableShape>(
  ledger: Ledger,
  run: {
    readonly kind: string;
    readonly table: string;
    readonly lot?: string;
    readonly request?: string;
    readonly fingerprint?: string;
    readonly parents?: readonly string[];
  },
  shape: S,
  columns: Columns<S>,
): Promise<Manifest> =>
  ledger.commit({
    kind: run.kind,
    ...(run.lot === undefined ? {} : { lot: run.lot }),
    ...(run.fingerprint === undefined ? {} : { fingerprint: run.fingerprint }),
    inputs: [],
    parents: run.parents ?? [],
    parameters: run.request === undefined ? {} : { request: run.request },
    modelVersion: "1",
    tables: { [run.table]: tableStream(shape, columns) },
  });

/** Names of everything under a folder, with `/`, in text order. */
export async function everythingIn(folder: string, prefix = ""): Promise<string[]> {
  const names: string[] = [];
  for await (const entry of Deno.readDir(folder)) {
    names.push(prefix + entry.name);
    if (entry.isDirectory) {
      names.push(...await everythingIn(`${folder}/${entry.name}`, `${prefix}${entry.name}/`));
    }
  }
  return names.sort();
}
