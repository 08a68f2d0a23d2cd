import { InputError } from "../../shared/errors.ts";
import { openLedger } from "../ledger/mod.ts";
import { loadFacts } from "../query/flag/mod.ts";
import { sheetOf } from "../query/review/sheet_data.ts";
import { lotOf } from "../query/trace_find.ts";
import { sheetPage } from "../review/sheet.ts";
import type { SheetData } from "../review_types.ts";
import { type CommonOptions, printJson } from "./common.ts";
import { prepare } from "./flag.ts";
import { writePage } from "./review.ts";

export interface SheetCommandOptions extends CommonOptions {
  readonly request: readonly string[];
  readonly out?: string;
}

/** Writes the page that travels with a die, or its content as JSON. */
export async function sheetCommand(die: string, options: SheetCommandOptions): Promise<0> {
  if (options.format === "csv") {
    throw new InputError("Cannot write a die sheet as CSV: need --out FILE or --format json");
  }
  if (options.out === undefined && options.format !== "json") {
    throw new InputError("Cannot write the die sheet: need --out FILE for the page, or --format json");
  }
  let lot: string;
  {
    await using ledger = await openLedger(options.ledger, { write: false });
    const found = await lotOf(ledger, die);
    if (!found.isDie) {
      throw new InputError(`Cannot write a sheet of ${die}: need a die, such as K07-1/05`, { value: die });
    }
    lot = found.lot;
  }
  const { requests } = await prepare([lot], options);
  let data: SheetData;
  {
    await using ledger = await openLedger(options.ledger, { write: false });
    const { platforms } = options;
    const facts = await loadFacts(ledger, lot, {
      requests,
      figures: [],
      ...(platforms === undefined ? {} : { platforms }),
    });
    data = await sheetOf(ledger, facts, die);
  }
  if (options.format === "json") printJson(data);
  if (options.out !== undefined) await writePage(options.out, sheetPage(data));
  return 0;
}
