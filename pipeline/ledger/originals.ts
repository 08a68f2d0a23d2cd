import { createHash } from "node:crypto";
import { join } from "node:path";
import { InputError } from "../../shared/errors.ts";
import { hashFile, isDiskError, statOrNull, writeAll } from "./disk.ts";
import type { Layout } from "./layout.ts";
import type { StagedOriginal } from "./types.ts";

export type OriginalSource = string | ReadableStream<Uint8Array> | Uint8Array;

/** Copies a file beside the originals, byte by byte, and hashes it on the way. @throws InputError if it can't be read */
export async function stageOriginal(layout: Layout, source: OriginalSource): Promise<StagedOriginal> {
  const stream = await openSource(source);
  const path = join(layout.staging, crypto.randomUUID());
  const hash = createHash("sha256");
  let bytes = 0;
  try {
    using file = await Deno.open(path, { write: true, createNew: true });
    for await (const piece of stream) {
      await writeAll(file, piece);
      hash.update(piece);
      bytes += piece.length;
    }
    await file.sync();
  } catch (error) {
    await Deno.remove(path).catch(() => {});
    throw error;
  }
  return { sha256: hash.digest("hex"), bytes, path };
}

async function openSource(source: OriginalSource): Promise<AsyncIterable<Uint8Array>> {
  if (source instanceof Uint8Array) return ReadableStream.from([source]);
  if (typeof source !== "string") return source;
  try {
    const file = await Deno.open(source, { read: true });
    if (!(await file.stat()).isFile) {
      file.close();
      throw new InputError("Cannot take it in: found no regular file", { file: source });
    }
    return file.readable;
  } catch (error) {
    if (!isDiskError(error)) throw error;
    throw new InputError(`Cannot read ${source}: ${error.message}`, { file: source }, { cause: error });
  }
}

/**
 * Puts a staged copy in its place. A kept original is left alone if it is what its name says; if it was damaged, the
 * good copy replaces it.
 */
export async function placeOriginal(layout: Layout, staged: StagedOriginal): Promise<void> {
  const target = join(layout.originals, staged.sha256);
  if (await isIntact(target, staged)) {
    await Deno.remove(staged.path).catch(() => {}); // the same file may have been staged twice under one path
  } else {
    await Deno.rename(staged.path, target);
  }
}

async function isIntact(path: string, staged: StagedOriginal): Promise<boolean> {
  const there = await statOrNull(path);
  return there !== null && there.size === staged.bytes && (await hashFile(path)).sha256 === staged.sha256;
}
