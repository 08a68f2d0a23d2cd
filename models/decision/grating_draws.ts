// Pure: no I/O, no clock, no hidden randomness.
import {
  type Grating,
  gratingFromWalls,
  type MismatchProfile,
  missingFraction,
  type PoledSection,
  type PolingWindow as WindowStatistics,
  realiseGrating,
  type Stretch,
  uniformGrating,
  unpoledGaps,
} from "../poling/mod.ts";
import { poledStretches } from "../pairs/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import type { GuideInputs, PolingWindow } from "./guide_inputs.ts";

/** Poling numbers of one draw, for a guide whose grating is known by duty, spread and missing share only. */
export interface PolingDraw {
  readonly duty: number;
  readonly dutySd: number;
  readonly merged: number;
}

/** The section of a guide that was meant to be poled. */
export const sectionOf = (guide: GuideInputs): PoledSection => ({
  poledFrom: guide.poledFrom,
  poledLength: guide.poledLength,
  period: guide.period,
  guideLength: guide.length,
});

/** The grating as inspected, or null when it is known by its statistics only. */
export function inspectedGrating(guide: GuideInputs): Grating | null {
  return guide.poling.from === "walls" ? gratingFromWalls(guide.poling.walls, sectionOf(guide)) : null;
}

/**
 * The grating whose peak the guide is run at: as inspected, or an ideal one where the mismatch varies along the guide; null
 * where the design period alone decides.
 */
export function gratingForPeak(
  guide: Pick<GuideInputs, "poledFrom" | "poledLength" | "period">,
  walls: Grating | null,
  profile: MismatchProfile | undefined,
): Grating | null {
  if (walls !== null || profile === undefined || !(guide.poledLength > 0)) return walls;
  return uniformGrating({ start: guide.poledFrom, length: guide.poledLength, period: guide.period });
}

/** Beyond this a grating is no grating. */
const MOST_DUTY = 0.98;

/** One grating with a guide's poling statistics: draw `index` of its own seeded stream. */
export function drawGrating(guide: GuideInputs, draw: PolingDraw, index: number): Grating {
  const random = randomFrom(`${guide.id}|grating|${index}`);
  const at = { start: guide.poledFrom, length: guide.poledLength, period: guide.period };
  const { poling } = guide;
  if (poling.from === "windows") {
    const seen = windowStatistics(poling.windows);
    if (poling.duty === undefined) return realiseGrating({ ...at, windows: seen }, random);
    // Windows of a die or wafer are not this guide's own: it may differ from them as guides do.
    const shift = draw.duty - poling.duty.value;
    const windows = seen.map((w) => ({
      ...w,
      duty: Math.min(MOST_DUTY, Math.max(1 - MOST_DUTY, w.duty + shift)),
    }));
    return realiseGrating({ ...at, windows }, random);
  }
  return realiseGrating({ ...at, duty: draw.duty, dutySd: draw.dutySd, missing: draw.merged }, random);
}

/**
 * Windows as statistics at their middles, ascending; windows with one middle (repeats) are averaged by their domains. Where
 * all domains are missing none has a duty: it is taken from the windows beside, which is where domains fade out.
 */
export function windowStatistics(windows: readonly PolingWindow[]): WindowStatistics[] {
  const byCentre = new Map<number, PolingWindow[]>();
  for (const w of windows) {
    const centre = w.from + w.length / 2;
    byCentre.set(centre, [...byCentre.get(centre) ?? [], w]);
  }
  const places = [...byCentre].sort(([a], [b]) => a - b).map(([centre, repeats]) => ({
    centre,
    repeats,
    domains: repeats.reduce((sum, w) => sum + w.domains, 0),
  }));
  return places.map(({ centre, repeats, domains }) => {
    const average = (f: (w: PolingWindow) => number): number => {
      if (domains > 0) return repeats.reduce((sum, w) => sum + f(w) * w.domains, 0) / domains;
      const before = places.findLast((p) => p.domains > 0 && p.centre < centre);
      const after = places.find((p) => p.domains > 0 && p.centre > centre);
      const of = (p: typeof places[number]) =>
        p.repeats.reduce((sum, w) => sum + f(w) * w.domains, 0) / p.domains;
      if (before === undefined || after === undefined) {
        const only = before ?? after;
        return only === undefined ? f(repeats[0]!) : of(only);
      }
      const t = (centre - before.centre) / (after.centre - before.centre);
      return of(before) + t * (of(after) - of(before));
    };
    return {
      centre,
      duty: average((w) => w.dutyMean),
      dutySd: average((w) => w.dutySd),
      missing: missingFraction(domains, repeats.reduce((sum, w) => sum + w.merged, 0)),
    };
  });
}

/** Where pairs are made: the poled section, less stretches without domains over three periods where walls tell. */
export function convertingStretches(guide: GuideInputs, walls: Grating | null): Stretch[] {
  const from = walls?.start ?? guide.poledFrom;
  const to = walls?.end ?? guide.poledFrom + guide.poledLength;
  const stretches = poledStretches(from, to, walls === null ? [] : unpoledGaps(walls, guide.period));
  // Walls at the ends and none between: nothing converts anywhere, and the place of a pair is as good as any.
  return stretches.length > 0 ? stretches : [{ from, to }];
}
