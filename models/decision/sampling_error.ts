// Pure: no I/O, no clock, no hidden randomness.
import { standardDeviation } from "../../shared/statistics.ts";
import { type Limits, meets, summarise } from "./conformity.ts";
import type { SampleSize } from "./draws.ts";

/** A decision is settled when its probability is this many standard errors of the sample away from both thresholds. */
const SETTLED_ERRORS = 2;
/**
 * A requirement whose limit is further than this from the figure's mean, in units of its u, is taken to be met or missed for
 * sure. Of 16 draws that margin is known to 0.4: what it lacks to 1.28, where 0.9 of all draws conform, is 1.7 errors.
 */
const SURE_MARGIN = 2;
/** A figure follows the spectra when at least this share of its variance lies between draws of different spectra. */
const CARRIED_SHARE = 0.5;

/** A figure with a requirement on it; NaN where a draw has no value. */
export interface RequiredFigure {
  readonly draws: Float64Array;
  readonly limits: Limits;
}

/**
 * Whether more draws could hardly change a decision: a probability as far from a threshold t as it was found would come out
 * of n draws by chance only beyond {@link SETTLED_ERRORS} standard errors √(t(1 − t)/n) of a share that is t.
 *
 * The binomial error is the cautious choice: it holds for independent draws, and strata only take variance away (a Latin
 * hypercube of n has at most n/(n − 1) times the variance of n independent draws for any function of the inputs: A. B. Owen,
 * SIAM J. Numer. Anal. 34, 1884 (1997); from memory). It would not be cautious for draws that share a spectrum: there n is
 * the number of spectra.
 */
export function settledAt(
  probability: number,
  required: readonly RequiredFigure[],
  size: SampleSize,
  thresholds: { readonly acceptAt: number; readonly rejectBelow: number },
): boolean {
  const n = independentDraws(required, size);
  return [thresholds.acceptAt, thresholds.rejectBelow].every((t) =>
    Math.abs(probability - t) >= SETTLED_ERRORS * Math.sqrt(t * (1 - t) / n)
  );
}

/** Draws that a share of conforming ones is made of: the spectra alone where a figure that follows them is in doubt. */
export function independentDraws(required: readonly RequiredFigure[], size: SampleSize): number {
  const bySpectra = required.some((r) => inDoubt(r) && followsSpectra(r.draws, size));
  return bySpectra ? size.spectral : size.draws;
}

function inDoubt({ draws, limits }: RequiredFigure): boolean {
  const summary = summarise(draws);
  if (summary === null || summary.u === 0) return false;
  const good = meets(draws, limits).reduce((sum, x) => sum + x, 0);
  if (good > 0 && good < summary.valid) return true;
  return [limits.atLeast, limits.atMost].some((l) => Math.abs(summary.mean - l) < SURE_MARGIN * summary.u);
}

/** Whether a figure's draws go with the spectrum that they take (that of draw k modulo the number of spectra). */
export function followsSpectra(draws: Float64Array, { spectral }: SampleSize): boolean {
  if (draws.length === spectral) return false;
  const sums = new Float64Array(spectral);
  const counts = new Float64Array(spectral);
  draws.forEach((x, k) => {
    if (Number.isNaN(x)) return;
    sums[k % spectral]! += x;
    counts[k % spectral]!++;
  });
  const means = [...sums.keys()].filter((j) => counts[j]! > 0).map((j) => sums[j]! / counts[j]!);
  const values = draws.filter((x) => !Number.isNaN(x));
  if (means.length < 2) return false;
  return standardDeviation(means) ** 2 > CARRIED_SHARE * standardDeviation(values) ** 2;
}
