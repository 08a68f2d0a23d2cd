import { dirname } from "node:path";
import { csvText } from "../console/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { openLedger } from "../ledger/mod.ts";
import { loadRules } from "../query/flag/mod.ts";
import { reviewOf } from "../query/review/build.ts";
import { allYieldRows, YIELD_COLUMNS } from "../review/yield_rows.ts";
import { reviewPage } from "../review/page.ts";
import type { ReviewData } from "../review_types.ts";
import { type CommonOptions, note, print, printJson } from "./common.ts";
import { flagsOfLot, prepare } from "./flag.ts";

export interface ReviewCommandOptions extends CommonOptions {
  readonly request: readonly string[];
  readonly rules?: string;
  readonly out?: string;
}

/** Writes the review of a lot: a page (`--out`), its content as JSON, or its yields as CSV. Exit 1: something is flagged. */
export async function reviewCommand(lot: string, options: ReviewCommandOptions): Promise<0 | 1> {
  if (options.out === undefined && options.format === "table") {
    throw new InputError("Cannot write the review: need --out FILE for the page, or --format json or csv");
  }
  const rules = await loadRules(options.rules);
  const { requests } = await prepare([lot], options);
  let data: ReviewData;
  {
    await using ledger = await openLedger(options.ledger, { write: false });
    const found = await flagsOfLot(ledger, lot, requests, rules, options);
    data = await reviewOf(ledger, { ...found, rules });
  }
  if (options.format === "json") printJson(data);
  else if (options.format === "csv") print(csvText([...YIELD_COLUMNS], allYieldRows(data)));
  if (options.out !== undefined) await writePage(options.out, reviewPage(data));
  return data.flags.some((f) => f.severity !== "note") ? 1 : 0;
}

/** Writes a page; a folder that is not there is the caller's mistake and said as such. */
export async function writePage(path: string, page: string): Promise<void> {
  try {
    await Deno.writeTextFile(path, page);
  } catch (cause) {
    const why = cause instanceof Deno.errors.NotFound
      ? `there is no folder ${dirname(path)}`
      : (cause as Error).message;
    throw new InputError(`Cannot write the page ${path}: ${why}`, { file: path }, { cause });
  }
  const size = new TextEncoder().encode(page).length;
  note(`${path}: ${(size / 1e6).toFixed(2)} MB, opens in any browser, without a network`);
}
