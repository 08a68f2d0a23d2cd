import { InputError, LedgerError } from "../../shared/errors.ts";
import { isDiskError, namesIn, statOrNull } from "./disk.ts";
import type { Layout } from "./layout.ts";
import { LOCK_FILE } from "./lock.ts";

/** @throws InputError where there is no ledger to read */
export async function requireLedger(layout: Layout): Promise<void> {
  await refuseFile(layout.root);
  const runs = await looking(layout.root, () => statOrNull(layout.runs));
  if (runs?.isDirectory) return;
  throw new InputError(
    `Cannot read the ledger ${layout.root}: found none there; take in a run folder first (wavelot ingest <run-folder>)`,
    { file: layout.root },
  );
}

/**
 * Makes the folders of a ledger where they are missing. A folder that holds something else is refused, so that a
 * mistyped path does not become a ledger. Returns whether the ledger's own folder was made.
 * @throws InputError for a place that can't be one, LedgerError for a ledger that can't be written
 */
export async function makeLedger(layout: Layout): Promise<{ madeRoot: boolean }> {
  await refuseFile(layout.root);
  const names = await looking(layout.root, () => namesIn(layout.root));
  const own = [layout.originals, layout.runs, layout.staging].map((path) =>
    path.slice(layout.root.length + 1)
  );
  const foreign = names.find((name) => ![...own, LOCK_FILE].includes(name));
  if (foreign !== undefined && !names.includes("runs")) {
    throw new InputError(
      `Cannot make a ledger of ${layout.root}: found other files there (${foreign} …), need an empty or a new folder`,
      { file: layout.root },
    );
  }
  const madeRoot = await looking(layout.root, () => statOrNull(layout.root)) === null;
  try {
    for (const path of [layout.originals, layout.runs, layout.staging]) {
      await Deno.mkdir(path, { recursive: true });
    }
  } catch (error) {
    if (!isDiskError(error)) throw error;
    const existed = names.includes("runs");
    throw new (existed ? LedgerError : InputError)(
      `Cannot ${existed ? "write to" : "make"} the ledger ${layout.root}: ${error.message}`,
      { file: layout.root },
      { cause: error },
    );
  }
  return { madeRoot };
}

/** Takes back what `makeLedger` made, as far as it is empty: a call that failed has written nothing. */
export async function unmakeLedger(layout: Layout, madeRoot: boolean): Promise<void> {
  const paths = [layout.staging, layout.originals, layout.runs, ...(madeRoot ? [layout.root] : [])];
  for (const path of paths) await Deno.remove(path).catch(() => {});
}

async function refuseFile(root: string): Promise<void> {
  const there = await looking(root, () => statOrNull(root));
  if (there !== null && !there.isDirectory) {
    throw new InputError(`Cannot use ${root} as a ledger: found a file, need a folder`, { file: root });
  }
}

async function looking<T>(root: string, step: () => Promise<T>): Promise<T> {
  try {
    return await step();
  } catch (error) {
    if (!isDiskError(error)) throw error;
    throw new InputError(`Cannot use ${root} as a ledger: ${error.message}`, { file: root }, {
      cause: error,
    });
  }
}
