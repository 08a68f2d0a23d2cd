import { join } from "node:path";
import { LedgerError } from "../../shared/errors.ts";
import { hashFile } from "./disk.ts";
import type { Layout } from "./layout.ts";
import { openTableFile, type TableFile } from "./parquet_read.ts";
import type { Manifest } from "./types.ts";

/**
 * Opens tables of runs. Before a file is read for the first time its hash is compared with the manifest's: a flipped
 * bit inside a column decodes without a complaint, and hashing (over 1 GB/s) costs less than decoding.
 */
export class TableStore {
  readonly #verified = new Map<string, Promise<void>>();
  constructor(readonly layout: Layout) {}

  /** @throws RangeError for a table that the run has not, LedgerError naming a file that is not as it was written */
  async open(manifest: Manifest, table: string): Promise<TableFile> {
    const stated = manifest.tables[table];
    if (stated === undefined) {
      throw new RangeError(
        `Cannot read table "${table}" of ${manifest.run}: found ${
          Object.keys(manifest.tables).join(", ") || "none"
        }`,
      );
    }
    const path = join(this.layout.runs, manifest.run, stated.file);
    let verified = this.#verified.get(path);
    if (verified === undefined) this.#verified.set(path, verified = verify(path, stated.sha256));
    await verified;
    const file = await openTableFile(path);
    if (file.rows === stated.rows) return file;
    file[Symbol.dispose]();
    throw new LedgerError(`Cannot use ${path}: found ${file.rows} rows, the manifest says ${stated.rows}`, {
      file: path,
    });
  }
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
