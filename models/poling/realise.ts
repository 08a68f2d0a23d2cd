// Pure: no I/O, no clock, no hidden randomness.
import type { Random } from "../../shared/random.ts";
import { type Grating, laidDomainsIn } from "./grating.ts";

/** Statistics of the domains around one place, as a poling inspection gives them. */
export interface PolingWindow {
  /** Middle of the window, m from the input facet. */
  readonly centre: number;
  /** Mean width of inverted domains / period. */
  readonly duty: number;
  /** Standard deviation of that width / period. */
  readonly dutySd: number;
  /** Fraction of inverted domains that are missing. */
  readonly missing: number;
}

export interface Realisation {
  /** Poled section and period, m. */
  readonly start: number;
  readonly length: number;
  readonly period: number;
  /** Ascending centres; linear in z between them, constant beyond. Takes the place of the three numbers below. */
  readonly windows?: readonly PolingWindow[];
  /** Default ½. */
  readonly duty?: number;
  /** Default 0. */
  readonly dutySd?: number;
  /** Default 0. */
  readonly missing?: number;
}

/** merged / (domains + merged): the probability p that an inverted domain is missing. 0 for nothing counted. */
export function missingFraction(domains: number, merged: number): number {
  if (!(domains >= 0 && merged >= 0)) {
    throw new RangeError(
      `Cannot take a missing fraction of ${merged} merged and ${domains} found: need counts >= 0`,
    );
  }
  return merged === 0 ? 0 : merged / (domains + merged);
}

/**
 * One grating with the statistics of the windows. Every wall has its own normal error of standard deviation
 * σ_wall = dutySd·Λ/√2, which gives the width of an inverted domain the standard deviation dutySd·Λ; an inverted domain is
 * missing with probability `missing`, and then both of its walls are dropped. A domain whose walls have changed places
 * has not formed; two that touch have merged, and the walls between them are gone. Every domain takes the same amount of
 * random numbers, whatever the statistics: the same seed with a slightly other duty is a slightly other grating.
 * @throws RangeError for a duty outside 0…1, a negative spread, a fraction outside 0…1 or unordered windows
 */
export function realiseGrating(of: Realisation, random: Random): Grating {
  const { start, length, period } = of;
  const windows = of.windows ??
    [{ centre: start, duty: of.duty ?? 0.5, dutySd: of.dutySd ?? 0, missing: of.missing ?? 0 }];
  checkWindows(windows);
  const count = laidDomainsIn(length, period);
  const end = start + length;
  const walls = new Float64Array(2 * count);
  const here = { duty: 0, dutySd: 0, missing: 0 };
  let size = 0;
  let segment = 0;
  for (let n = 0; n < count; n++) {
    const centre = start + (n + 0.5) * period;
    while (segment + 1 < windows.length && windows[segment + 1]!.centre <= centre) segment++;
    statisticsInto(windows, segment, centre, here);
    const absent = random.uniform() < here.missing;
    const sigma = here.dutySd * period / Math.SQRT2;
    const left = Math.max(start, centre - here.duty * period / 2 + sigma * random.normal());
    const right = Math.min(end, centre + here.duty * period / 2 + sigma * random.normal());
    if (absent || !(left < right)) continue;
    // Union with the domains before that it touches: usually none.
    let from = left;
    let to = right;
    for (; size > 0 && from <= walls[size - 1]!; size -= 2) {
      from = Math.min(from, walls[size - 2]!);
      to = Math.max(to, walls[size - 1]!);
    }
    walls[size++] = from;
    walls[size++] = to;
  }
  return { walls: walls.slice(0, size), start, end, firstSign: 1 };
}

function checkWindows(windows: readonly PolingWindow[]): void {
  if (windows.length === 0) throw new RangeError("Cannot realise a grating from 0 windows: need at least 1");
  let last = -Infinity;
  for (const w of windows) {
    if (
      !(w.duty >= 0 && w.duty <= 1 && w.dutySd >= 0 && Number.isFinite(w.dutySd) && w.missing >= 0 &&
        w.missing <= 1 && Number.isFinite(w.centre) && w.centre > last)
    ) {
      throw new RangeError(
        `Cannot realise a grating from the window at ${w.centre} m with duty ${w.duty}, spread ${w.dutySd}, missing ` +
          `${w.missing}: need ascending centres, duty and missing in 0…1, spread >= 0`,
      );
    }
    last = w.centre;
  }
}

function statisticsInto(
  windows: readonly PolingWindow[],
  segment: number,
  z: number,
  out: { duty: number; dutySd: number; missing: number },
): void {
  const a = windows[segment]!;
  const b = windows[segment + 1];
  const t = b === undefined || z <= a.centre ? 0 : (z - a.centre) / (b.centre - a.centre);
  const to = b ?? a;
  out.duty = a.duty + t * (to.duty - a.duty);
  out.dutySd = a.dutySd + t * (to.dutySd - a.dutySd);
  out.missing = a.missing + t * (to.missing - a.missing);
}
