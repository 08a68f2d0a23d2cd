import type { Ledger } from "../../ledger/mod.ts";
import { type LotDesign, type PolingRecord, recordsOf } from "../../records.ts";
import { quantileOfSorted } from "../../../shared/statistics.ts";
import { completeWalls, streamWalls } from "../../traits/guide_walls.ts";
import { type ReadingRef, refsOf, type TraitRow } from "../../traits/trait_row.ts";

/** The period that was found in a guide, against the one that was drawn. */
export interface GuidePeriod {
  readonly guide_id: string;
  readonly wafer: string;
  readonly drawn_um: number;
  readonly found_um: number;
  readonly u_um: number;
  readonly from: "walls" | "windows";
  readonly readings: readonly ReadingRef[];
}

/** Periods from complete wall lists, else from a guide's own poling windows. */
export async function guidePeriods(
  ledger: Ledger,
  design: LotDesign,
  traits: readonly TraitRow[],
): Promise<GuidePeriod[]> {
  const { lot } = design.lot;
  const out = new Map<string, GuidePeriod>();
  const byGuide = new Map<string, PolingRecord[]>();
  for (const w of await recordsOf(ledger, "poling", lot)) {
    if (w.guide_id === null) continue;
    const held = byGuide.get(w.guide_id);
    if (held === undefined) byGuide.set(w.guide_id, [w]);
    else held.push(w);
  }
  for (const [id, windows] of byGuide) {
    const guide = design.guideById.get(id)!;
    const found = periodFromWindows(windows);
    if (found === null) continue;
    const readings = refsOf("poling", windows);
    out.set(id, {
      guide_id: id,
      wafer: guide.wafer,
      drawn_um: guide.period_um,
      ...found,
      from: "windows",
      readings,
    });
  }
  const complete = completeWalls(traits);
  if (complete.size > 0) {
    for await (const { guide_id, positions_um, refs } of streamWalls(ledger, lot)) {
      if (complete.get(guide_id) !== refs[0]!.file_name) continue;
      const guide = design.guideById.get(guide_id)!;
      const found = periodFromWalls(positions_um);
      if (found === null) continue;
      out.set(guide_id, {
        guide_id,
        wafer: guide.wafer,
        drawn_um: guide.period_um,
        ...found,
        from: "walls",
        readings: refs,
      });
    }
  }
  return [...out.values()];
}

/** Fewer repeats of a period say too little. */
const LEAST = 20;

/**
 * Median distance of every second wall: missing domains, up to half of all, don't move it. Its u is that of a median of as
 * many independent distances (1.2533·s/√n), with s from the quartiles, since missing domains would blow up any other.
 */
export function periodFromWalls(positions_um: ArrayLike<number>): { found_um: number; u_um: number } | null {
  const steps = new Float64Array(Math.max(0, positions_um.length - 2));
  if (steps.length < LEAST) return null;
  for (let i = 0; i < steps.length; i++) steps[i] = positions_um[i + 2]! - positions_um[i]!;
  steps.sort();
  const found_um = quantileOfSorted(steps, 0.5);
  const s = (quantileOfSorted(steps, 0.75) - quantileOfSorted(steps, 0.25)) / 1.349; // quartiles of a normal
  // Neighbouring distances share a wall: two of them count as one.
  return { found_um, u_um: 1.2533 * s / Math.sqrt(steps.length / 2) };
}

/**
 * Length over domains counted, merged ones included. A window cuts domains at both its ends, and whoever counts rounds alike in every window:
 * u is half a domain per window, all in one direction.
 */
export function periodFromWindows(
  windows: readonly {
    readonly window_length_mm: number;
    readonly domains: number;
    readonly merged: number;
  }[],
): { found_um: number; u_um: number } | null {
  const count = windows.reduce((sum, w) => sum + w.domains + w.merged, 0);
  if (count < LEAST) return null;
  const found_um = windows.reduce((sum, w) => sum + 1e3 * w.window_length_mm, 0) / count;
  return { found_um, u_um: found_um * 0.5 * windows.length / count };
}
