import type { Ledger, Manifest } from "../ledger/mod.ts";
import { rowsOf } from "../records.ts";
import type { TraitRow } from "./trait_row.ts";

/** Trait rows of a reduce run, in their order: positions are handles. */
export async function loadTraits(ledger: Ledger, run: Manifest): Promise<TraitRow[]> {
  const table = await ledger.readTable(run, "traits");
  return rowsOf(table).map((row) => ({
    ...row,
    readings: JSON.parse(row.readings as string),
  })) as unknown as TraitRow[];
}
