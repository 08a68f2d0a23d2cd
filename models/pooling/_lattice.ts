// Pure: no I/O, no clock, no hidden randomness.
import type { Maximum } from "./_maximise.ts";

/** A point of the integration with its share of the whole. */
export interface LatticePoint {
  readonly at: Float64Array;
  readonly share: number;
}

/** Distance of the points in standard deviations, by dimension: the rectangle rule's error for a normal is 2e^(−2π²/h²). */
const STEPS = [1, 0.75, 1, 1.25, 1.5];
/** From points this much less probable than the best (natural logarithm) the search goes no further … */
const DEPTH = 5.5;
/** … and of the neighbours found last those below this carry nothing that counts. */
const LEAST = 9;
/** Bound on the work for densities far from normal. */
const MOST_POINTS = 4000;

/**
 * Points and shares that integrate over a density: a lattice along the axes of its curvature at the maximum, explored
 * from there outwards as far as the density reaches, so that skewed and bent densities are followed
 * (H. Rue, S. Martino & N. Chopin, J. R. Stat. Soc. B 71, 319 (2009), section 3; from memory).
 * @param logDensity natural logarithm of the density, up to a constant
 * @param curvature curvature along each axis, positive
 */
export function lattice(
  logDensity: (x: Float64Array) => number,
  { at: centre, value, axes }: Maximum,
  curvature: readonly number[],
): LatticePoint[] {
  const n = centre.length;
  const h = STEPS[Math.min(n, STEPS.length - 1)]!;
  const place = (steps: readonly number[]): Float64Array =>
    centre.map((c, i) => {
      let x = c;
      for (let a = 0; a < n; a++) x += axes.get(i, a) * steps[a]! * h / Math.sqrt(curvature[a]!);
      return x;
    });
  const origin = new Array<number>(n).fill(0);
  const queue: { steps: number[]; at: Float64Array; log: number }[] = [{
    steps: origin,
    at: centre,
    log: value,
  }];
  const seen = new Set([origin.join()]);
  let best = value;
  for (let k = 0; k < queue.length && seen.size < MOST_POINTS; k++) {
    const { steps, log } = queue[k]!;
    if (log < best - DEPTH) continue;
    for (let a = 0; a < n; a++) {
      for (const by of [-1, 1]) {
        const next = steps.with(a, steps[a]! + by);
        const key = next.join();
        if (seen.has(key)) continue;
        seen.add(key);
        const at = place(next);
        const found = logDensity(at);
        best = Math.max(best, found);
        if (found >= best - LEAST) queue.push({ steps: next, at, log: found });
      }
    }
  }
  const kept = queue.filter(({ log }) => log >= best - LEAST);
  const weights = kept.map(({ log }) => Math.exp(log - best));
  const total = weights.reduce((sum, w) => sum + w, 0);
  return kept.map(({ at }, k) => ({ at, share: weights[k]! / total }));
}
