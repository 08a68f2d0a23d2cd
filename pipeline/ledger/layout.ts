import { join } from "node:path";

/** Where things are in a ledger. */
export interface Layout {
  readonly root: string;
  readonly originals: string;
  readonly runs: string;
  /** Copies on their way to `originals`. */
  readonly staging: string;
}

export const PENDING_PREFIX = ".pending-";
export const MANIFEST_FILE = "manifest.json";

export function layoutOf(root: string): Layout {
  return {
    root,
    originals: join(root, "originals"),
    runs: join(root, "runs"),
    staging: join(root, ".staging"),
  };
}
