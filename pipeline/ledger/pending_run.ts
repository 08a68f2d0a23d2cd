import { join } from "node:path";
import type { Schema } from "apache-arrow";
import { LedgerError } from "../../shared/errors.ts";
import { isDiskError, syncDirectory, writeFlushed } from "./disk.ts";
import { type Layout, MANIFEST_FILE, PENDING_PREFIX } from "./layout.ts";
import { encodeManifest, nameManifest } from "./manifest.ts";
import { placeOriginal, stageOriginal } from "./originals.ts";
import { type TableFileWriter, writeTableFile } from "./parquet_write.ts";
import type { Manifest, PendingRun, RunStatement, RunTable, StagedOriginal } from "./types.ts";

/** The points a commit passes, in order; a caller may look on (the tests pull the plug there). */
export type CommitStage =
  | "started"
  | "tables written"
  | "manifest written"
  | "originals placed"
  | "run placed";

export interface PendingOptions {
  readonly kind: string;
  readonly program: string;
  readonly now: () => Date;
  readonly nextSequence: () => Promise<number>;
  readonly staged?: readonly StagedOriginal[];
  readonly onStage: (stage: CommitStage) => void | Promise<void>;
  readonly onCommitted: (manifest: Manifest) => void;
}

/**
 * Starts a run in a hidden folder. Order of a commit, so that a crash at any point leaves either nothing visible or
 * all of it: tables (flushed), manifest (flushed), the folder (flushed), originals renamed into place, folder renamed
 * into place. An original without a run is the worst that can stay, and the next writer clears it by the manifest in
 * the hidden folder.
 */
export async function startRun(layout: Layout, options: PendingOptions): Promise<PendingRun> {
  const folder = join(layout.runs, PENDING_PREFIX + crypto.randomUUID());
  await Deno.mkdir(folder);
  await options.onStage("started");
  const writers = new Map<string, TableFileWriter>();
  const staged: StagedOriginal[] = [...options.staged ?? []];
  let over = false;

  async function discard() {
    if (over) return;
    over = true;
    for (const writer of writers.values()) await writer.abort();
    for (const { path } of staged) await Deno.remove(path).catch(() => {});
    await Deno.remove(folder, { recursive: true }).catch(() => {});
  }

  async function finishTables(): Promise<Record<string, RunTable>> {
    const tables: Record<string, RunTable> = {};
    for (const [name, writer] of writers) {
      tables[name] = { file: `${name}.parquet`, ...await writer.finish() };
    }
    await options.onStage("tables written");
    return tables;
  }

  async function commit(statement: RunStatement): Promise<Manifest> {
    if (over) throw new TypeError("Cannot commit a run twice, or after it was discarded");
    const manifest = nameManifest({
      format: 1,
      sequence: await options.nextSequence(),
      kind: options.kind,
      lot: statement.lot,
      created: options.now().toISOString(),
      program: options.program,
      model: statement.modelVersion,
      parameters: statement.parameters,
      fingerprint: statement.fingerprint,
      parents: statement.parents,
      inputs: statement.inputs,
      tables: await finishTables(),
    });
    refuseMissingOriginals(manifest, staged);
    await writeFlushed(join(folder, MANIFEST_FILE), encodeManifest(manifest));
    await syncDirectory(folder);
    await options.onStage("manifest written");
    for (const original of staged) await placeOriginal(layout, original);
    await syncDirectory(layout.originals);
    await options.onStage("originals placed");
    await Deno.rename(folder, join(layout.runs, manifest.run));
    await syncDirectory(layout.runs);
    over = true;
    options.onCommitted(manifest);
    await options.onStage("run placed");
    return manifest;
  }

  return {
    async stageOriginal(source) {
      const original = await diskWrites(layout, () => stageOriginal(layout, source));
      staged.push(original);
      return original;
    },
    table(name: string, schema: Schema) {
      if (over) throw new TypeError(`Cannot open table "${name}": the run is over`);
      if (!/^[a-z][a-z0-9_]*$/.test(name)) {
        throw new TypeError(`Cannot open table "${name}": need a name of a-z, 0-9 and _`);
      }
      const writer = writers.get(name) ?? writeTableFile(join(folder, `${name}.parquet`), schema);
      writers.set(name, writer);
      return {
        get rows() {
          return writer.rows;
        },
        write: (batch) => diskWrites(layout, () => writer.write(batch)),
      };
    },
    async commit(statement) {
      try {
        return await diskWrites(layout, () => commit(statement));
      } catch (error) {
        await discard();
        throw error;
      }
    },
    discard,
  };
}

/** Every input must have its original among the staged ones: a run whose evidence is not kept proves nothing. */
function refuseMissingOriginals(manifest: Manifest, staged: readonly StagedOriginal[]): void {
  const kept = new Set(staged.map((original) => original.sha256));
  const missing = manifest.inputs.find((input) => !kept.has(input.sha256));
  if (missing !== undefined) {
    throw new TypeError(`Cannot commit ${manifest.run}: input ${missing.name} was not staged as an original`);
  }
}

/** A full disk or a lost permission while writing is the ledger's trouble. */
async function diskWrites<T>(layout: Layout, step: () => Promise<T>): Promise<T> {
  try {
    return await step();
  } catch (error) {
    if (!isDiskError(error) || "exitCode" in error) throw error;
    throw new LedgerError(`Cannot write to the ledger ${layout.root}: ${error.message}`, {
      file: layout.root,
    }, {
      cause: error,
    });
  }
}
