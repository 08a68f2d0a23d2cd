import { gratingFromWalls, wallsComplete, wallStatistics } from "../../models/poling/mod.ts";
import { mm, um } from "../../shared/units.ts";
import type { GuideWalls } from "../traits/guide_walls.ts";
import { type ReadingRef, refsOf, type TraitRow } from "../traits/trait_row.ts";
import type { PolingRecord } from "../records.ts";
import { grouped, type LotReadings, placeOf, type Reduced } from "./lot_readings.ts";

/** What inspected domains say, summed over windows or counted from walls. */
interface PolingCounts {
  readonly domains: number;
  readonly merged: number;
  readonly duty: number;
  readonly dutySd: number;
  /** Standard deviation of the windows' means about their mean, for a duty that drifts along the guide. */
  readonly between: number;
  readonly windows: number;
}

/** Poling windows of each guide (or die, or wafer): mean duty, its spread, share of missing domains. */
export function reducePoling(readings: LotReadings): Reduced {
  const out: Reduced = { traits: [], remarks: [] };
  for (const windows of grouped(readings.poling, (r) => r.unit)) {
    const counts = countWindows(windows);
    if (counts === null) {
      out.remarks.push({
        code: "poling_empty",
        unit: windows[0]!.unit,
        statement: `${windows[0]!.unit}: poling windows with no domain counted say nothing`,
      });
      continue;
    }
    const place = placeOf(windows[0]!, readings.design);
    out.traits.push(
      ...polingTraits(place, counts, `poling windows (${windows.length})`, refsOf("poling", windows)),
    );
  }
  return out;
}

function countWindows(windows: readonly PolingRecord[]): PolingCounts | null {
  const domains = windows.reduce((sum, w) => sum + w.domains, 0);
  const merged = windows.reduce((sum, w) => sum + w.merged, 0);
  if (domains + merged === 0) return null;
  const average = (f: (w: PolingRecord) => number) =>
    windows.reduce((sum, w) => sum + w.domains * f(w), 0) / domains;
  const duty = average((w) => w.duty_mean);
  const counted = windows.filter((w) => w.domains > 0);
  const spread = counted.length < 2
    ? 0
    : counted.reduce((sum, w) => sum + (w.duty_mean - duty) ** 2, 0) / (counted.length - 1);
  return {
    domains,
    merged,
    duty,
    dutySd: Math.sqrt(average((w) => w.duty_sd ** 2)),
    between: Math.sqrt(spread),
    windows: counted.length,
  };
}

type Place = Pick<TraitRow, "scope" | "unit" | "wafer" | "die_id" | "guide_id" | "width_um">;

function polingTraits(
  place: Place,
  counts: PolingCounts,
  method: string,
  readings: readonly ReadingRef[],
): TraitRow[] {
  const { domains, merged, duty, dutySd, between, windows } = counts;
  const common = {
    ...place,
    wavelength_nm: null,
    polarisation: null,
    process: null,
    u_from: "fit" as const,
    method,
    readings,
    detail: `${domains} inverted domains, ${merged} missing`,
  };
  // Missing share: a Jeffreys interval's standard deviation, so that none seen among few is not certainty
  // (L. D. Brown, T. T. Cai & A. DasGupta, Stat. Sci. 16, 101 (2001); from memory).
  const total = domains + merged;
  const share = (merged + 0.5) / (total + 1);
  const missing: TraitRow = {
    ...common,
    trait: "merged",
    value: merged / total,
    u: Math.sqrt(share * (1 - share) / (total + 2)),
    counted: total,
  };
  if (domains === 0) return [missing]; // no domain, so no duty: but that all are missing is known
  return [
    {
      ...common,
      trait: "duty",
      value: duty,
      u: Math.hypot(dutySd / Math.sqrt(domains), between / Math.sqrt(Math.max(1, windows))),
    },
    { ...common, trait: "duty_sd", value: dutySd, u: dutySd / Math.sqrt(2 * domains) },
    missing,
  ];
}

/** Wall lists: complete ones count as exact and give statistics for other guides; incomplete ones are said so and left. */
export function reduceWalls(readings: LotReadings, walls: GuideWalls): Reduced {
  const out: Reduced = { traits: [], remarks: [] };
  const guide = readings.design.guideById.get(walls.guide_id);
  if (guide === undefined) return out;
  const section = {
    poledFrom: mm(guide.poled_from_mm),
    poledLength: mm(guide.poled_length_mm),
    period: um(guide.period_um),
    guideLength: mm(guide.length_mm),
  };
  const positions = walls.positions_um.map(um);
  const verdict = walls.quarantined > 0
    ? {
      complete: false,
      reason: `${walls.quarantined} of its rows ${walls.quarantined === 1 ? "is" : "are"} quarantined`,
      remarks: [],
    }
    : wallsComplete(positions, section);
  const place: Place = {
    scope: "guide",
    unit: walls.guide_id,
    wafer: guide.wafer,
    die_id: guide.die_id,
    guide_id: guide.guide_id,
    width_um: guide.width_um,
  };
  const common = {
    ...place,
    wavelength_nm: null,
    polarisation: null,
    process: null,
    u: 0,
    u_from: "fit" as const,
    method: `walls (${positions.length})`,
    readings: walls.refs,
  };
  const why = verdict.complete
    ? verdict.remarks.join("; ")
    : `incomplete: ${verdict.reason}; not used as exact`;
  out.traits.push({
    ...common,
    trait: "walls_complete",
    value: verdict.complete ? 1 : 0,
    detail: why === "" ? null : why,
  });
  if (!verdict.complete) {
    out.remarks.push({
      code: "walls_incomplete",
      unit: walls.guide_id,
      statement: `${walls.guide_id}: wall list ${why}`,
    });
    return out;
  }
  for (const remark of verdict.remarks) {
    out.remarks.push({
      code: "walls_doubtful",
      unit: walls.guide_id,
      statement: `${walls.guide_id}: ${remark}`,
    });
  }
  const stats = wallStatistics(gratingFromWalls(positions, section), section.period);
  if (stats.used >= 2) {
    out.traits.push(...polingTraits(
      place,
      {
        domains: stats.used,
        merged: stats.merged,
        duty: stats.dutyMean,
        dutySd: stats.dutySd,
        between: 0,
        windows: 1,
      },
      `walls (${positions.length})`,
      walls.refs,
    ));
  }
  return out;
}
