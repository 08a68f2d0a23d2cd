// Pure: no I/O, no clock, no hidden randomness.
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import { lowerQuantile } from "../pooling/lower_quantile.ts";
import type { Random } from "../../shared/random.ts";
import type { Uncertain } from "../../shared/vocabulary.ts";

/** How many draws a prediction is made of. */
export interface SampleSize {
  /** Draws of the whole sample; all of them feed budgets, temperatures and efficiencies. A multiple of `spectral`. */
  readonly draws: number;
  /** Draws for which spectra are computed; they are the first ones of the sample. */
  readonly spectral: number;
}

/** What a guide is predicted with unless its decision asks for more. */
export const DEFAULT_SAMPLE: SampleSize = { draws: 256, spectral: 16 };

/**
 * Probabilities of a nested Latin hypercube for one input: all `n` values fall one into each of n equal strata, and the
 * first `nested` values fall one into each of `nested` equal strata, so that the first ones are a good sample by
 * themselves. Stratified sampling: M. D. McKay, R. J. Beckman & W. J. Conover, Technometrics 21, 239 (1979); the use
 * of samples for propagation: JCGM 101:2008.
 * @throws RangeError unless `nested` divides `n`
 */
export function nestedStrata(n: number, nested: number, random: Random): Float64Array {
  if (!(n > 0 && nested > 0 && n % nested === 0)) {
    throw new RangeError(`Cannot nest ${nested} strata in ${n}: need a divisor`);
  }
  const perCoarse = n / nested;
  const taken = new Uint8Array(n);
  const out = new Float64Array(n);
  shuffled(nested, random).forEach((coarse, k) => {
    const fine = coarse * perCoarse + random.below(perCoarse);
    taken[fine] = 1;
    out[k] = (fine + random.uniform()) / n;
  });
  const free: number[] = [];
  for (let fine = 0; fine < n; fine++) if (taken[fine] === 0) free.push(fine);
  shuffled(free.length, random).forEach((pick, k) => out[nested + k] = (free[pick]! + random.uniform()) / n);
  return out;
}

function shuffled(n: number, random: Random): number[] {
  const order = Array.from({ length: n }, (_, i) => i);
  for (let i = n - 1; i > 0; i--) {
    const j = random.below(i + 1);
    [order[i], order[j]] = [order[j]!, order[i]!];
  }
  return order;
}

/** Φ⁻¹, good in both tails. */
const quantile = (q: number): number => q <= 0.5 ? lowerQuantile(q) : -lowerQuantile(1 - q);

/** Natural bounds of a trait's true value. */
export interface Bounds {
  readonly low?: number;
  readonly high?: number;
}

/**
 * Draws of a normal trait, truncated to its natural bounds (the reading may lie outside, the latent value can't).
 * u = 0 gives the value itself, moved to the nearer bound if it lies outside.
 */
export function drawTrait(trait: Uncertain, bounds: Bounds, strata: Float64Array): Float64Array {
  const { value, u } = trait;
  const low = bounds.low ?? -Infinity;
  const high = bounds.high ?? Infinity;
  if (u === 0) return new Float64Array(strata.length).fill(Math.min(high, Math.max(low, value)));
  // Probabilities are counted from the nearer tail: 1 − Φ loses all digits where the value lies far above its bound.
  const flip = value < low;
  const sign = flip ? -1 : 1;
  const [a, b] = flip ? [(value - high) / u, (value - low) / u] : [(low - value) / u, (high - value) / u];
  const pa = a === -Infinity ? 0 : normalCdf(a, 0, 1);
  const pb = b === Infinity ? 1 : normalCdf(b, 0, 1);
  return strata.map((p) => {
    const q = flip ? pb - p * (pb - pa) : pa + p * (pb - pa);
    // Beyond 37 u even Φ is 0: the draw is the bound, to all digits that matter.
    const z = q > 1e-300 ? quantile(q) : b;
    return Math.min(high, Math.max(low, value + sign * u * z));
  });
}
