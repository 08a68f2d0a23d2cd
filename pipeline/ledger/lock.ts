import { join } from "node:path";
import { LedgerError } from "../../shared/errors.ts";
import { isDiskError, statOrNull } from "./disk.ts";

/** Held for as long as a ledger is open for writing. */
export interface Lock {
  release(options: { readonly removeFile: boolean }): Promise<void>;
}

export const LOCK_FILE = ".lock";

/**
 * Takes the one writer's lock of a ledger. The system drops the lock when the process ends, however it ends, so a
 * lock file that lies about is no lock. @throws LedgerError saying who holds it
 */
export async function takeLock(directory: string, now: Date): Promise<Lock> {
  const path = join(directory, LOCK_FILE);
  const file = await openLockFile(path);
  let held = false;
  try {
    held = await file.tryLock(true) && await isFileAt(file, path);
    if (!held) {
      throw new LedgerError(
        `Cannot write to the ledger ${directory}: found it locked by ${await holder(path)}, need it free`,
        { file: path },
      );
    }
    await file.truncate(0);
    await file.write(new TextEncoder().encode(`process ${Deno.pid} since ${now.toISOString()}\n`));
  } finally {
    if (!held) file.close();
  }
  return {
    async release({ removeFile }) {
      // The file goes before the lock does: whoever opens it anew afterwards makes a new one.
      if (removeFile) await Deno.remove(path).catch(() => {});
      file.close();
    },
  };
}

async function openLockFile(path: string): Promise<Deno.FsFile> {
  try {
    return await Deno.open(path, { read: true, write: true, create: true });
  } catch (error) {
    if (!isDiskError(error)) throw error;
    throw new LedgerError(`Cannot write to the ledger: ${error.message}`, { file: path }, { cause: error });
  }
}

/** False if the file was removed between opening and locking: then the lock guards nothing. */
async function isFileAt(file: Deno.FsFile, path: string): Promise<boolean> {
  const [mine, there] = [await file.stat(), await statOrNull(path)];
  return there !== null && mine.ino === there.ino && mine.dev === there.dev;
}

async function holder(path: string): Promise<string> {
  try {
    return (await Deno.readTextFile(path)).trim() || "another process";
  } catch {
    return "another process"; // some systems do not let a locked file be read
  }
}
