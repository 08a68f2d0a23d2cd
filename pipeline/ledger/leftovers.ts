import { join } from "node:path";
import { namesIn } from "./disk.ts";
import { type Layout, MANIFEST_FILE, PENDING_PREFIX } from "./layout.ts";
import type { Manifest } from "./types.ts";

/**
 * Clears what a writer that died left behind; call it under the lock only. Its originals are those that its hidden
 * manifest lists and no run holds.
 */
export async function clearLeftovers(layout: Layout, runs: readonly Manifest[]): Promise<void> {
  const held = new Set(runs.flatMap((run) => run.inputs.map((input) => input.sha256)));
  for (const name of await namesIn(layout.runs)) {
    if (!name.startsWith(PENDING_PREFIX)) continue;
    const folder = join(layout.runs, name);
    for (const hash of await originalsOf(join(folder, MANIFEST_FILE))) {
      if (!held.has(hash)) await Deno.remove(join(layout.originals, hash)).catch(() => {});
    }
    await Deno.remove(folder, { recursive: true });
  }
  for (const name of await namesIn(layout.staging)) await Deno.remove(join(layout.staging, name));
}

/** Hashes in a manifest that may be cut short or missing: then no original of it was in place yet. */
async function originalsOf(path: string): Promise<string[]> {
  try {
    const { inputs } = JSON.parse(await Deno.readTextFile(path)) as Manifest;
    return inputs.map((input) => input.sha256).filter((hash) => /^[0-9a-f]{64}$/.test(hash));
  } catch {
    return [];
  }
}
