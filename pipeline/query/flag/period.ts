import {
  type CountedWindow,
  type CountingOffset,
  countingOffset,
  densityFromWindows,
  periodFromWalls,
} from "../../../models/decision/period_found.ts";
import type { Ledger } from "../../ledger/mod.ts";
import { type GuideRecord, type LotDesign, type PolingRecord, recordsOf } from "../../records.ts";
import { completeWalls, streamWalls } from "../../traits/guide_walls.ts";
import { type ReadingRef, refsOf, type TraitRow } from "../../traits/trait_row.ts";
import { mergeRefs } from "./types.ts";

/** A period that was found in some guides of a wafer, against the one that was drawn. */
export interface FoundPeriod {
  readonly wafer: string;
  /** Ids; a die or wafer where windows name no guide. */
  readonly units: readonly string[];
  /** Null: of the whole wafer, whose guides were drawn with several periods; then `found_um` is relative to 1. */
  readonly drawn_um: number | null;
  /** Found over drawn. */
  readonly ratio: number;
  readonly u_ratio: number;
  readonly from: "walls" | "windows";
  /** Windows, or walls. */
  readonly count: number;
  readonly readings: readonly ReadingRef[];
}

/** Periods of a lot: of each guide with complete walls, and, from poling windows pooled, of each drawn period and of each wafer. */
export async function foundPeriods(
  ledger: Ledger,
  design: LotDesign,
  traits: readonly TraitRow[],
): Promise<FoundPeriod[]> {
  const { lot } = design.lot;
  const windows = pooledWindows(await recordsOf(ledger, "poling", lot), design);
  const complete = completeWalls(traits);
  const walls: FoundPeriod[] = [];
  if (complete.size > 0) {
    for await (const { guide_id, positions_um, refs } of streamWalls(ledger, lot)) {
      if (complete.get(guide_id) !== refs[0]!.file_name) continue;
      const guide = design.guideById.get(guide_id)!;
      const found = periodFromWalls(positions_um);
      if (found === null) continue;
      walls.push({
        wafer: guide.wafer,
        units: [guide_id],
        drawn_um: guide.period_um,
        ratio: found.period / guide.period_um,
        u_ratio: found.u / guide.period_um,
        from: "walls",
        count: positions_um.length,
        readings: refs,
      });
    }
  }
  return [...walls, ...windows];
}

interface Group {
  readonly wafer: string;
  readonly drawn_um: number;
  readonly rows: PolingRecord[];
}

/** Periods from windows, pooled over a wafer's guides of one drawn period, and over all of a wafer. */
export function pooledWindows(rows: readonly PolingRecord[], design: LotDesign): FoundPeriod[] {
  const groups = new Map<string, Group>();
  for (const row of rows) {
    const guides = guidesOf(row, design);
    const drawn = new Set(guides.map((g) => g.period_um));
    // A window on a die or wafer says which guide only where all were drawn alike.
    if (drawn.size !== 1) continue;
    const [{ wafer, period_um }] = guides as [GuideRecord];
    const key = `${wafer}|${period_um}`;
    const held = groups.get(key);
    if (held === undefined) groups.set(key, { wafer, drawn_um: period_um, rows: [row] });
    else held.rows.push(row);
  }
  const all = [...groups.values()];
  const habit = countingOffset(all.map(countedOf));
  const found = all.flatMap((g) => foundIn(g.wafer, g.drawn_um, [g], habit));
  const byWafer = Map.groupBy(all, (g) => g.wafer);
  const whole = [...byWafer].filter(([, own]) => own.length > 1).flatMap(([wafer, own]) =>
    foundIn(wafer, null, own, habit)
  );
  return [...found, ...whole];
}

function guidesOf(row: PolingRecord, design: LotDesign): readonly GuideRecord[] {
  if (row.guide_id !== null) return [design.guideById.get(row.guide_id)!];
  if (row.die_id !== null) return design.guidesOfDie.get(row.die_id)!;
  return design.guides.filter((g) => g.wafer === row.wafer);
}

const countedOf = ({ rows, drawn_um }: Group): CountedWindow[] =>
  rows.map((r) => ({ domains: r.domains + r.merged, drawn: 1e3 * r.window_length_mm / drawn_um }));

function foundIn(
  wafer: string,
  drawn_um: number | null,
  own: readonly Group[],
  habit: CountingOffset,
): FoundPeriod[] {
  const found = densityFromWindows(own.flatMap(countedOf), habit);
  if (found === null) return [];
  const rows = own.flatMap((g) => g.rows);
  const ratio = 1 / (1 + found.density);
  return [{
    wafer,
    units: [...new Set(rows.map((r) => r.unit))],
    drawn_um,
    ratio,
    u_ratio: found.u * ratio * ratio,
    from: "windows",
    count: rows.length,
    readings: mergeRefs(refsOf("poling", rows)),
  }];
}
