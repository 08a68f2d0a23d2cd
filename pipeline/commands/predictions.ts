import { progressBar } from "../console/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { type Ledger, openLedger } from "../ledger/mod.ts";
import { predictLot } from "../predict/predict_lot.ts";
import { checkRanges } from "../predict/request_range.ts";
import { lotsOf } from "../records.ts";
import { reduceLot } from "../reduce/reduce_lot.ts";
import type { LoadedRequest } from "../requests.ts";
import { type CommonOptions, noteAll, threadsOf } from "./common.ts";

export interface Predicted {
  readonly lot: string;
  readonly request: string;
  readonly run: string;
  readonly computed: boolean;
}

/** The lots asked for, each known to the ledger; all of them when none is named. */
export async function chosenLots(ledger: Ledger, lots: readonly string[]): Promise<string[]> {
  const known = await lotsOf(ledger);
  for (const lot of lots) {
    if (!known.includes(lot)) {
      throw new InputError(
        `Unknown lot ${JSON.stringify(lot)}: the ledger ${ledger.directory} holds ${
          known.join(", ") || "none"
        }`,
        {
          value: lot,
        },
      );
    }
  }
  return lots.length > 0 ? [...new Set(lots)] : known;
}

/**
 * Brings traits and predictions of some lots up to date: each stage computes only what has changed. A platform or request
 * that can't be used ends the call before the first lot is touched.
 */
export async function bringUpToDate(
  options: CommonOptions,
  lots: readonly string[],
  requests: readonly LoadedRequest[],
  { quiet = false } = {},
): Promise<Predicted[]> {
  await using ledger = await openLedger(options.ledger, { write: true });
  const chosen = await chosenLots(ledger, lots);
  await checkRanges(ledger, chosen, requests, options.platforms);
  if (!quiet) noteAll(requests.flatMap((r) => r.remarks));
  const out: Predicted[] = [];
  for (const lot of chosen) {
    const { remarks } = await reduceLot(ledger, lot, options.platforms);
    if (!quiet) noteAll(remarks.map((r) => r.statement));
    using bar = progressBar(`predicting ${lot}`);
    const done = await predictLot(ledger, lot, requests, {
      ...(options.platforms === undefined ? {} : { platforms: options.platforms }),
      workers: threadsOf(options),
      onProgress: (n, of) => bar.update(n, of),
    });
    out.push(...done.map((d) => ({ lot, ...d })));
  }
  return out;
}
