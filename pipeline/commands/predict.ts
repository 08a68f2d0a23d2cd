import { formatRows } from "../console/mod.ts";
import { openLedger } from "../ledger/mod.ts";
import { loadAllRequests } from "../requests.ts";
import { type CommonOptions, note, print, printJson } from "./common.ts";
import { bringUpToDate } from "./predictions.ts";

export async function predictCommand(lot: string | undefined, options: CommonOptions): Promise<0> {
  const requests = await loadAllRequests(options.requests);
  {
    // A ledger that is not there is said before a lock is asked for, and before a folder is made.
    await using _ = await openLedger(options.ledger, { write: false });
  }
  const done = await bringUpToDate(options, lot === undefined ? [] : [lot], requests);
  if (options.format === "json") printJson({ predictions: done });
  else {
    const columns = ["lot", "request", "run", "computed"].map((title) => ({ title }));
    const rows = done.map((d) => [d.lot, d.request, d.run, d.computed ? "now" : "before"]);
    print(formatRows(options.format, columns, rows));
  }
  const fresh = done.filter((d) => d.computed).length;
  note(
    fresh === 0
      ? "Nothing had changed: nothing was computed"
      : `Computed ${fresh} of ${done.length} predictions`,
  );
  return 0;
}
