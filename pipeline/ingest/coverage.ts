import { compareIds, waferOf } from "../../shared/ids.ts";
import { READING_KINDS, type ReadingKind } from "../../shared/schemas/readings.ts";
import type { Lot } from "../../shared/schemas/lot.ts";
import { didYouMean, nearestId } from "../../shared/schemas/nearest.ts";
import type { Remarks } from "./issues.ts";
import type { KnownIds } from "./known_ids.ts";
import { LOT_FILE } from "./run_folder.ts";

/** That a file holds accepted rows about a unit. */
export interface Covered {
  readonly kind: string;
  readonly scope: string;
  readonly unit: string;
}

/** What one die or wafer has of one kind. */
export interface CoverageCell {
  /** Its guides that have readings of their own. */
  guides: number;
  /** Readings of the whole die (on a wafer's row: how many dies have them). */
  dies: number;
  /** Readings of the whole wafer. */
  wafer: boolean;
}

export interface CoverageRow {
  /** Full die id, or wafer id where there are too many dies for a row each. */
  readonly unit: string;
  readonly guides: number;
  readonly cells: Readonly<Record<ReadingKind, CoverageCell>>;
}

/** What of a lot is measured, by die (or wafer) and kind of reading. */
export interface Coverage {
  readonly by: "die" | "wafer";
  readonly rows: readonly CoverageRow[];
  readonly guides: number;
  readonly dies: number;
  readonly totals: Readonly<Record<ReadingKind, { guides: number; dies: number; wafers: number }>>;
  /** Coating runs of lot.json. */
  readonly coatings: number;
  /** … and how many of them have a spectrum. */
  readonly coatingsWithSpectrum: number;
}

/** Dies that still get a row each. */
export const MOST_DIES = 40;

/** Sums up what the files in force hold about the dies of a lot. */
export function summariseCoverage(
  known: KnownIds,
  covered: Iterable<Covered>,
  coatingRuns: ReadonlySet<string>,
): Coverage {
  const dies = known.dies().sort(compareIds);
  const by = dies.length > MOST_DIES ? "wafer" : "die";
  const rows = new Map<string, { unit: string; guides: number; cells: Record<ReadingKind, CoverageCell> }>();
  for (const die of dies) {
    const unit = by === "die" ? die : waferOf(die);
    const row = rows.get(unit) ??
      { unit, guides: 0, cells: byKind(() => ({ guides: 0, dies: 0, wafer: false })) };
    row.guides += known.guidesOnDie(die);
    rows.set(unit, row);
  }
  const totals = byKind(() => ({ guides: 0, dies: 0, wafers: 0 }));
  const spectra = new Set<string>();
  const seen = new Set<string>();
  for (const { kind, scope, unit } of covered) {
    const key = `${kind}\n${scope}\n${unit}`;
    if (seen.has(key)) continue; // several files may hold readings of one unit
    seen.add(key);
    if (scope === "coating_run" && coatingRuns.has(unit)) spectra.add(unit);
    const total = totals[kind as ReadingKind];
    if (total === undefined || scope === "coating_run") continue;
    if (scope === "wafer") {
      total.wafers++;
      for (const row of rows.values()) {
        if (waferOf(row.unit) === unit) row.cells[kind as ReadingKind].wafer = true;
      }
      continue;
    }
    const die = scope === "guide" ? known.guide(unit)?.die : unit;
    const cell = die === undefined
      ? undefined
      : rows.get(by === "die" ? die : waferOf(die))?.cells[kind as ReadingKind];
    if (cell === undefined) continue; // of an older guides.csv: no guide of this lot any more
    if (scope === "guide") {
      cell.guides++;
      total.guides++;
    } else {
      cell.dies++;
      total.dies++;
    }
  }
  return {
    by,
    rows: [...rows.values()],
    guides: known.guideCount,
    dies: dies.length,
    totals,
    coatings: coatingRuns.size,
    coatingsWithSpectrum: spectra.size,
  };
}

const byKind = <T>(make: () => T): Record<ReadingKind, T> =>
  Object.fromEntries(READING_KINDS.map((kind) => [kind, make()])) as Record<ReadingKind, T>;

/** Coverage of a lot; coating runs with a spectrum but no die, or the other way round, get a remark. */
export function coverageOf(
  lot: Lot,
  known: KnownIds,
  covered: Iterable<Covered>,
  remarks: Remarks,
): Coverage {
  const all = [...covered];
  const coatings = new Set(lot.coatings.map((c) => c.coating_run));
  const spectra = new Set(all.filter((c) => c.scope === "coating_run").map((c) => c.unit));
  for (const run of coatings) {
    if (spectra.has(run)) continue;
    const statement =
      `coating run ${run} has no spectrum in facets*.csv; the platform's coated default stands in`;
    remarks.add("coating_without_spectrum", LOT_FILE, statement);
  }
  for (const run of spectra) {
    if (coatings.has(run)) continue;
    const near = didYouMean(nearestId(run, [...coatings]));
    const statement =
      `lot.json names no coating run ${run}${near}; its spectrum is kept, and no die of this lot uses it`;
    remarks.add("unknown_coating_run", LOT_FILE, statement);
  }
  return summariseCoverage(known, all, coatings);
}
