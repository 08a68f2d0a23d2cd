import type { Ledger, Manifest } from "../../ledger/mod.ts";
import { rowsOf } from "../../records.ts";
import type { ReadingRef } from "../../traits/trait_row.ts";
import type { ContradictionFact, NextReadingFact, RestoredFact } from "./facts.ts";

/** What a prediction found about its own readings and guides; nothing of a table that its run does not hold. */
export interface Analyses {
  readonly contradictions: readonly ContradictionFact[];
  readonly restored: readonly RestoredFact[];
  readonly nextReadings: readonly NextReadingFact[];
}

/** The analyses that a prediction run holds. */
export async function loadAnalyses(ledger: Ledger, run: Manifest): Promise<Analyses> {
  const table = async <T>(name: string): Promise<T[]> =>
    run.tables[name] === undefined ? [] : rowsOf(await ledger.readTable(run, name)) as unknown as T[];
  const contradictions = await table<Omit<ContradictionFact, "readings"> & { readings: string }>(
    "contradictions",
  );
  return {
    contradictions: contradictions.map((c) => ({ ...c, readings: JSON.parse(c.readings) as ReadingRef[] })),
    restored: await table<RestoredFact>("restored"),
    nextReadings: await table<NextReadingFact>("next_readings"),
  };
}
