import { join } from "node:path";
import { LedgerError } from "../../shared/errors.ts";
import { hashFile } from "./disk.ts";
import type { Layout } from "./layout.ts";
import { openTableFile, type TableFile } from "./parquet_read.ts";
import type { Manifest, RunTable } from "./types.ts";

/**
 * Opens tables of runs. Before a file is read for the first time its hash is compared with the manifest's: a flipped
 * bit inside a column decodes without a complaint, and hashing (over 1 GB/s) costs less than decoding.
 */
export class TableStore {
  readonly #verified = new Map<string, Promise<void>>();
  constructor(readonly layout: Layout) {}

  /** @throws RangeError for a table that the run has not, LedgerError naming a file that is not as it was written */
  async open(manifest: Manifest, table: string): Promise<TableFile> {
    const { sha256 } = stated(manifest, table);
    const path = this.#path(manifest, table);
    let verified = this.#verified.get(path);
    if (verified === undefined) this.#verified.set(path, verified = verify(path, sha256));
    await verified;
    return await this.openUnverified(manifest, table);
  }

  /** Without the comparison of hashes: to look at columns, not at rows. */
  async openUnverified(manifest: Manifest, table: string): Promise<TableFile> {
    const { rows } = stated(manifest, table);
    const path = this.#path(manifest, table);
    const file = await openTableFile(path);
    if (file.rows === rows) return file;
    file[Symbol.dispose]();
    throw new LedgerError(`Cannot use ${path}: found ${file.rows} rows, the manifest says ${rows}`, {
      file: path,
    });
  }

  #path(manifest: Manifest, table: string): string {
    return join(this.layout.runs, manifest.run, stated(manifest, table).file);
  }
}

function stated(manifest: Manifest, table: string): RunTable {
  const found = manifest.tables[table];
  if (found !== undefined) return found;
  const names = Object.keys(manifest.tables).join(", ") || "none";
  throw new RangeError(`Cannot read table "${table}" of ${manifest.run}: found ${names}`);
}

async function verify(path: string, expected: string): Promise<void> {
  const found = await hashFile(path).catch((error) => {
    throw new LedgerError(`Cannot read ${path}: ${error.message}`, { file: path }, { cause: error });
  });
  if (found.sha256 === expected) return;
  throw new LedgerError(
    `Cannot use ${path}: its sha256 is ${found.sha256}, the manifest says ${expected}; the file was changed`,
    { file: path },
  );
}
