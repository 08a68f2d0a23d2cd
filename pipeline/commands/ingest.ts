import { type Cell, csvText, progressBar, textTable } from "../console/mod.ts";
import { coverageText, ingestFolder, ingestJson, type IngestResult, remarkText } from "../ingest/mod.ts";
import { openLedger } from "../ledger/mod.ts";
import { loadPlatform } from "../platforms.ts";
import { type CommonOptions, note, noteAll, print, printJson } from "./common.ts";

/** Exit 1 when rows are quarantined: they are kept aside and not used. */
export async function ingestCommand(folder: string, options: CommonOptions): Promise<0 | 1> {
  let result: IngestResult;
  {
    await using ledger = await openLedger(options.ledger, { write: true });
    using bar = progressBar("reading");
    result = await ingestFolder(folder, ledger, {
      checkLot: async (lot) => void await loadPlatform(lot.platform, options.platforms),
      onProgress: ({ done, of }) => bar.update(done, of),
    });
  }
  noteAll(result.remarks.map(remarkText));
  if (options.format === "json") printJson(ingestJson(result));
  else if (options.format === "csv") print(csvText(TITLES, fileRows(result)));
  else {
    const what = result.already_held
      ? `nothing new: everything is held, by ${result.run}`
      : `taken in as ${result.run}`;
    print(`Lot ${result.lot}: ${what}`);
    print(textTable(TITLES.map((title) => ({ title })), fileRows(result), { width: 80 }));
    print(coverageText(result.coverage));
  }
  if (result.quarantined > 0) {
    note(
      `${result.quarantined} of ${result.rows} rows ${
        result.quarantined === 1 ? "is" : "are"
      } quarantined: ` +
        `wavelot sql "SELECT file_name, source_line, \\"column\\", value, reason, wanted FROM quarantine"`,
    );
  }
  return result.quarantined > 0 ? 1 : 0;
}

const TITLES = ["file", "kind", "rows", "accepted", "quarantined"];

const fileRows = ({ files }: IngestResult): Cell[][] =>
  files.map((f) => [f.name, f.kind, f.rows, f.accepted, f.quarantined]);
