import { createHash } from "node:crypto";

/** Writes all of it: one call may take only a part. */
export async function writeAll(file: Deno.FsFile, bytes: Uint8Array): Promise<void> {
  for (let done = 0; done < bytes.length;) {
    done += await file.write(bytes.subarray(done));
  }
}

/** Writes a new file and flushes it to the disk; a file of that name is an error. */
export async function writeFlushed(path: string, bytes: Uint8Array): Promise<void> {
  using file = await Deno.open(path, { write: true, createNew: true });
  await writeAll(file, bytes);
  await file.sync();
}

/** Flushes a directory, so that a rename in it outlives a power cut. Systems that cannot open one have no such need. */
export async function syncDirectory(path: string): Promise<void> {
  if (Deno.build.os === "windows") return;
  using directory = await Deno.open(path, { read: true });
  await directory.sync();
}

/** sha256 of bytes or text, lower-case hex. */
export function sha256(data: Uint8Array | string): string {
  return createHash("sha256").update(data).digest("hex");
}

/** sha256 and length of a file, read in pieces. */
export async function hashFile(path: string): Promise<{ sha256: string; bytes: number }> {
  using file = await Deno.open(path, { read: true });
  const hash = createHash("sha256");
  const piece = new Uint8Array(1 << 20);
  let bytes = 0;
  for (let n = await file.read(piece); n !== null; n = await file.read(piece)) {
    hash.update(piece.subarray(0, n));
    bytes += n;
  }
  return { sha256: hash.digest("hex"), bytes };
}

/** What is at a path, or null for nothing. */
export async function statOrNull(path: string): Promise<Deno.FileInfo | null> {
  try {
    return await Deno.stat(path);
  } catch (error) {
    if (error instanceof Deno.errors.NotFound || error instanceof Deno.errors.NotADirectory) return null;
    throw error;
  }
}

/** Names in a directory, in text order; none where there is no directory. */
export async function namesIn(path: string): Promise<string[]> {
  const names: string[] = [];
  try {
    for await (const entry of Deno.readDir(path)) names.push(entry.name);
  } catch (error) {
    if (!(error instanceof Deno.errors.NotFound)) throw error;
  }
  return names.sort();
}

/** Whether an error came from the file system (no permission, disk full …), not from a mistake of ours. */
export function isDiskError(error: unknown): error is Error {
  return error instanceof Error &&
    ("code" in error || Object.values(Deno.errors).some((kind) => error instanceof kind));
}
