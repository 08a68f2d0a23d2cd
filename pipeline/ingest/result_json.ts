import type { IngestResult } from "./ingest_folder.ts";

/** The result as `--format json` prints it. */
export function ingestJson(result: IngestResult): Record<string, unknown> {
  return {
    run: result.run,
    lot: result.lot,
    files: result.files.map(({ name, kind, sha256, rows, accepted, quarantined }) => ({
      name,
      kind,
      sha256,
      rows,
      accepted,
      quarantined,
    })),
    rows: result.rows,
    accepted: result.accepted,
    quarantined: result.quarantined,
    already_held: result.already_held,
  };
}
