// Pure: no I/O, no clock, no hidden randomness.
import type { Matrix } from "ml-matrix";
import { normalTwoSided } from "../tails.ts";
import {
  allEqual,
  fitTerms,
  type NoAnswer,
  outermost,
  roundingSquares,
  type SiteValue,
  usableSites,
  weightedCentre,
} from "./site_fit.ts";
import { trendTerms } from "./trend.ts";

export interface NeighbourSimilarity {
  /** Moran's I: near 0 for unrelated neighbours, positive for alike, negative for alternating ones. */
  readonly i: number;
  /** Mean and standard deviation of I over unrelated normal values at these places. */
  readonly expected: number;
  readonly sd: number;
  readonly z: number;
  /** Two-sided, by the normal approximation. */
  readonly p: number;
  readonly dies: number;
  /** Pairs of neighbours. */
  readonly pairs: number;
}

/** With fewer the normal approximation misleads. */
export const LEAST_SIMILARITY_DIES = 10;

/**
 * Do neighbouring dies resemble each other? Moran's I (P. A. P. Moran, Biometrika 37, 17 (1950)) over all pairs
 * within `reach` (m), of the values less their mean or less slope and bow over the wafer. Mean and variance under
 * independence are those of residuals of a regression: with M = 1 − QQᵀ, I = (n/S₀)·eᵀWe/eᵀe has E = (n/S₀)·tr(MW)/(n
 * − k) and E[I²] = (n/S₀)²·[tr(MW)² + 2tr(MWMW)]/((n − k)(n − k + 2)) (A. D. Cliff, J. K. Ord, Geogr. Anal. 4, 267
 * (1972)), which for k = 1 is Moran's own. Weights of the sites are not used. The curved trend of a wafer also makes
 * neighbours alike: `"trend"` asks for what is left.
 * @throws RangeError for places or values that are no numbers, or a reach that is not > 0
 */
export function neighbourSimilarity(
  sites: readonly SiteValue[],
  reach: number,
  less: "mean" | "trend" = "mean",
): NeighbourSimilarity | NoAnswer {
  if (!(reach > 0)) throw new RangeError(`Cannot look for neighbours within ${reach} m: need a distance > 0`);
  const used = usableSites(sites).map(({ x, y, value }) => ({ x, y, value }));
  const n = used.length;
  if (n < LEAST_SIMILARITY_DIES) {
    return { refused: `similarity needs at least ${LEAST_SIMILARITY_DIES} dies, found ${n}` };
  }
  if (allEqual(used)) return { refused: "the values do not differ" };
  const pairs = pairsWithin(used, reach);
  if (pairs.length === 0) return { refused: "no two dies stand within reach of each other" };
  const t = trendTerms(outermost(used));
  const { basis: q, rank: k } = fitTerms(
    used,
    less === "mean" ? [t.constant] : [t.constant, t.x, t.y, t.bow],
  );
  const e = residuals(used, q);
  let [cross, square] = [0, 0];
  for (const [a, b] of pairs) cross += 2 * e[a]! * e[b]!;
  for (const r of e) square += r * r;
  const scale = n / (2 * pairs.length);
  // W has an empty diagonal, and tr(W²) is the number of its entries.
  const { trace, traceOfSquare } = projectedTraces(q, pairs, n);
  const df = n - k;
  const expected = scale * trace / df;
  const meanSquare = scale ** 2 * (trace ** 2 + 2 * traceOfSquare) / (df * (df + 2));
  const variance = meanSquare - expected ** 2;
  if (!(variance > 1e-12 * meanSquare)) {
    return { refused: "every die is a neighbour of every other: nothing to compare" };
  }
  if (square <= roundingSquares(used)) return { refused: "nothing is left beside the trend" };
  const sd = Math.sqrt(variance);
  const i = scale * cross / square;
  const z = (i - expected) / sd;
  return { i, expected, sd, z, p: normalTwoSided(z), dies: n, pairs: pairs.length };
}

function pairsWithin(sites: readonly SiteValue[], reach: number): [number, number][] {
  const pairs: [number, number][] = [];
  for (let a = 0; a < sites.length; a++) {
    for (let b = a + 1; b < sites.length; b++) {
      const apart = Math.hypot(sites[a]!.x - sites[b]!.x, sites[a]!.y - sites[b]!.y);
      // Pitches that are equal on the mask differ by rounding.
      if (apart <= reach * (1 + 1e-9)) pairs.push([a, b]);
    }
  }
  return pairs;
}

/** Values less their projection on the basis. */
function residuals(sites: readonly SiteValue[], q: Matrix): number[] {
  const centre = weightedCentre(sites);
  const y = sites.map((s) => s.value - centre);
  for (let j = 0; j < q.columns; j++) {
    const amount = y.reduce((sum, v, i) => sum + v * q.get(i, j), 0);
    for (let i = 0; i < y.length; i++) y[i]! -= amount * q.get(i, j);
  }
  return y;
}

/** tr(MW) and tr(MWMW) by the few columns of Q alone. */
function projectedTraces(q: Matrix, pairs: readonly [number, number][], n: number) {
  const k = q.columns;
  const wq = Array.from({ length: k }, () => new Float64Array(n));
  for (const [a, b] of pairs) {
    for (let j = 0; j < k; j++) {
      wq[j]![a]! += q.get(b, j);
      wq[j]![b]! += q.get(a, j);
    }
  }
  let [trace, once, twice] = [0, 0, 0];
  for (let j = 0; j < k; j++) {
    for (let m = 0; m < k; m++) {
      let element = 0;
      for (let i = 0; i < n; i++) element += q.get(i, m) * wq[j]![i]!;
      if (m === j) trace -= element;
      twice += element * element; // QᵀWQ is symmetric: the trace of its square
    }
    for (let i = 0; i < n; i++) once += wq[j]![i]! ** 2; // tr(QᵀW²Q)
  }
  return { trace, traceOfSquare: 2 * pairs.length - 2 * once + twice };
}
