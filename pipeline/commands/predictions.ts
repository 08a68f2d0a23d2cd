import { progressBar } from "../console/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { type Ledger, openLedger } from "../ledger/mod.ts";
import { predictLot } from "../predict/predict_lot.ts";
import { checkRanges } from "../predict/request_range.ts";
import { OutOfDate } from "../out_of_date.ts";
import { lotsOf, recordsOf } from "../records.ts";
import { reduceLot } from "../reduce/reduce_lot.ts";
import type { LoadedRequest } from "../requests.ts";
import { type CommonOptions, note, noteAll, threadsOf } from "./common.ts";

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
 * that can't be used ends the call before the first lot is touched. The writer's lock is taken only when there is something
 * to compute, so that many may ask a ledger at once.
 */
export async function bringUpToDate(
  options: CommonOptions,
  lots: readonly string[],
  requests: readonly LoadedRequest[],
  { quiet = false } = {},
): Promise<Predicted[]> {
  if (!quiet) noteAll(requests.flatMap((r) => r.remarks));
  try {
    await using ledger = await openLedger(options.ledger, { write: false });
    return await everyLot(ledger, options, lots, requests, quiet);
  } catch (error) {
    if (!(error instanceof OutOfDate)) throw error;
  }
  await using ledger = await openLedger(options.ledger, { write: true });
  return await everyLot(ledger, options, lots, requests, quiet);
}

async function everyLot(
  ledger: Ledger,
  options: CommonOptions,
  lots: readonly string[],
  requests: readonly LoadedRequest[],
  quiet: boolean,
): Promise<Predicted[]> {
  const chosen = await chosenLots(ledger, lots);
  await checkRanges(ledger, chosen, requests, options.platforms);
  const out: Predicted[] = [];
  // Traits are pooled over all lots of a platform: all of them are reduced before the first is predicted.
  for (const lot of await lotsPooledWith(ledger, chosen)) {
    const { remarks } = await reduceLot(ledger, lot, options.platforms, {
      workers: threadsOf(options),
      onSolving: solvingProgress(lot),
    });
    if (!quiet && chosen.includes(lot)) noteAll(remarks.map((r) => r.statement));
  }
  for (const lot of chosen) {
    const solving = solvingProgress(lot);
    using bar = progressBar(`predicting ${lot}`);
    const done = await predictLot(ledger, lot, requests, {
      ...(options.platforms === undefined ? {} : { platforms: options.platforms }),
      workers: threadsOf(options),
      onProgress: (n, of) => bar.update(n, of),
      onSolving: solving,
    });
    // Requests at neighbouring wavelengths rest on one reading: it is named once.
    const told = new Map(done.flatMap((d) => d.contradictions.map(({ reading, text }) => [reading, text])));
    if (!quiet) noteAll([...told.values()]);
    out.push(...done.map(({ contradictions: _, ...d }) => ({ lot, ...d })));
  }
  return out;
}

/** Lots of the platforms of some lots, these first. */
async function lotsPooledWith(ledger: Ledger, chosen: readonly string[]): Promise<string[]> {
  const platformOf = async (lot: string) => (await recordsOf(ledger, "lots", lot))[0]?.platform;
  const platforms = new Set(await Promise.all(chosen.map(platformOf)));
  const out = [...chosen];
  for (const lot of await lotsOf(ledger)) {
    if (!out.includes(lot) && platforms.has(await platformOf(lot))) out.push(lot);
  }
  return out;
}

/** Says that modes are being solved, and how far it is: seconds per drawn width, and only once per ledger. */
export function solvingProgress(what: string, kept = true): (done: number, of: number) => void {
  let bar: ReturnType<typeof progressBar> | null = null;
  return (done, of) => {
    if (done === 0) {
      note(
        `solving the modes of ${what}'s designs (${of} ${of === 1 ? "piece" : "pieces"}; ${
          kept ? "kept in the ledger" : "no ledger keeps them"
        })`,
      );
      bar = progressBar("solving modes");
    }
    bar?.update(done, of);
    if (done === of) bar?.[Symbol.dispose]();
  };
}
