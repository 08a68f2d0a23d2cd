import { join } from "node:path";
import { LedgerError } from "../../shared/errors.ts";
import { namesIn } from "./disk.ts";
import { type Layout, MANIFEST_FILE } from "./layout.ts";
import { decodeManifest } from "./manifest.ts";
import type { Manifest } from "./types.ts";

/**
 * Names of the run folders, oldest first. A hidden folder is a run that was never finished; other names (a file browser's,
 * say) are none of ours. A run folder that was renamed leaves a gap in the numbers.
 */
export async function runFolders(layout: Layout): Promise<string[]> {
  const names = (await namesIn(layout.runs)).filter((name) => /^\d{6,}-/.test(name));
  return names.sort((a, b) => Number.parseInt(a) - Number.parseInt(b) || (a < b ? -1 : 1));
}

/** One manifest, checked. @throws LedgerError naming the file */
export async function readManifest(layout: Layout, run: string): Promise<Manifest> {
  const file = join(layout.runs, run, MANIFEST_FILE);
  const bytes = await Deno.readFile(file).catch((error) => {
    throw new LedgerError(`Cannot read ${file}: ${error.message}`, { file }, { cause: error });
  });
  return decodeManifest(bytes, run, file);
}

/**
 * Every run, oldest first. A missing number is refused too: without that run an older version of its files would be
 * taken for the newest.
 * @throws LedgerError naming what does not hold
 */
export async function readRuns(layout: Layout): Promise<readonly Manifest[]> {
  const runs: Manifest[] = [];
  for (const name of await runFolders(layout)) {
    const manifest = await readManifest(layout, name);
    refuseGap(layout, manifest, runs.length + 1);
    runs.push(manifest);
  }
  return runs;
}

function refuseGap(layout: Layout, manifest: Manifest, expected: number): void {
  if (manifest.sequence === expected) return;
  const what = manifest.sequence > expected
    ? `run number ${expected} is missing`
    : `run number ${manifest.sequence} is there twice`;
  throw new LedgerError(`Cannot use the ledger ${layout.root}: ${what} (found ${manifest.run})`, {
    file: layout.runs,
  });
}
