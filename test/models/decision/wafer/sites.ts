import type { NoAnswer, SiteValue } from "../../../../models/decision/wafer/site_fit.ts";

/** The 56 dies of 8 mm × 10 mm that fit wholly or mostly on a wafer of 76 mm, with values by a function of place (m). */
export function wafer(value: (x: number, y: number, i: number) => number): SiteValue[] {
  const sites: SiteValue[] = [];
  for (let row = -4; row < 4; row++) {
    for (let column = -4; column <= 4; column++) {
      const [x, y] = [0.008 * column, 0.01 * (row + 0.5)];
      if (Math.hypot(x, y) < 0.0365) sites.push({ x, y, value: value(x, y, sites.length) });
    }
  }
  return sites;
}

export function isAnswer<T extends object>(result: T | NoAnswer): result is T {
  return !("refused" in result);
}
