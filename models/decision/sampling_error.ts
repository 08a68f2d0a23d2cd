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
const FOLLOWING_SHARE = 0.5;
/** A share between spectra below this is chance: with 16 of them it scatters by 0.03 for a figure that they leave alone. */
const CHANCE_SHARE = 0.1;

/** A figure with a requirement on it; NaN where a draw has no value. */
export interface RequiredFigure {
  readonly draws: Float64Array;
  readonly limits: Limits;
}

/**
 * Whether more draws could hardly change a decision: a probability as far from a threshold t as it was found would come out
 * of n draws by chance only beyond {@link SETTLED_ERRORS} standard errors √(t(1 − t)/n) of a share that is t; or a requirement
 * is missed by far, whatever the others are.
 *
 * The binomial error is the cautious choice: it holds for independent draws, and strata only take variance away (a Latin
 * hypercube of n has at most n/(n − 1) times the variance of n independent draws for any function of the inputs: A. B. Owen,
 * SIAM J. Numer. Anal. 34, 1884 (1997); from memory). It would not be cautious for draws that share spectra: they count as
 * {@link independentDraws}.
 */
export function settledAt(
  probability: number,
  required: readonly RequiredFigure[],
  size: SampleSize,
  thresholds: { readonly acceptAt: number; readonly rejectBelow: number },
): boolean {
  if (required.some(isMissed)) return true;
  const n = independentDraws(required, size);
  return [thresholds.acceptAt, thresholds.rejectBelow].every((t) =>
    Math.abs(probability - t) >= SETTLED_ERRORS * Math.sqrt(t * (1 - t) / n)
  );
}

/**
 * How many independent draws a share of conforming ones is worth: of a figure in doubt with a share ρ of its variance between
 * S spectra, the mean of n draws has the variance σ²(ρ/S + (1 − ρ)/n). The least over the figures.
 */
export function independentDraws(
  required: readonly RequiredFigure[],
  size: SampleSize,
): number {
  return Math.min(
    size.draws,
    ...required.filter(isInDoubt).map(({ draws }) => {
      const share = shareBetweenSpectra(draws, size);
      return share < CHANCE_SHARE ? size.draws : 1 / (share / size.spectral + (1 - share) / size.draws);
    }),
  );
}

/** No draw meets the requirement, and its limit is far away; or the figure does not exist. */
function isMissed({ draws, limits }: RequiredFigure): boolean {
  const summary = summarise(draws);
  if (summary === null) return true;
  const short = Math.max(limits.atLeast - summary.mean, summary.mean - limits.atMost);
  return short > 0 && short >= SURE_MARGIN * summary.u && !meets(draws, limits).includes(1);
}

function isInDoubt({ draws, limits }: RequiredFigure): boolean {
  const summary = summarise(draws);
  if (summary === null || summary.u === 0) return false;
  const good = meets(draws, limits).reduce((sum, x) => sum + x, 0);
  if (good > 0 && good < summary.valid) return true;
  return [limits.atLeast, limits.atMost].some((l) => Math.abs(summary.mean - l) < SURE_MARGIN * summary.u);
}

/** Whether a figure's draws go with the spectrum that they take (that of draw k modulo the number of spectra). */
export const followsSpectra = (draws: Float64Array, size: SampleSize): boolean =>
  shareBetweenSpectra(draws, size) > FOLLOWING_SHARE;

/** Share of a figure's variance between draws of different spectra, 0…1; 0 when every draw has its own. */
export function shareBetweenSpectra(draws: Float64Array, { spectral }: SampleSize): number {
  if (draws.length === spectral) return 0;
  const sums = new Float64Array(spectral);
  const counts = new Float64Array(spectral);
  draws.forEach((x, k) => {
    if (Number.isNaN(x)) return;
    sums[k % spectral]! += x;
    counts[k % spectral]!++;
  });
  const values = draws.filter((x) => !Number.isNaN(x));
  const means = [...sums.keys()].filter((j) => counts[j]! > 0).map((j) => sums[j]! / counts[j]!);
  if (means.length < 2 || values.length <= means.length) return 0;
  let within = 0;
  draws.forEach((x, k) => {
    if (!Number.isNaN(x)) within += (x - sums[k % spectral]! / counts[k % spectral]!) ** 2;
  });
  within /= values.length - means.length;
  // Means of groups scatter by chance, too: what the scatter within them makes of it is taken off.
  const between = Math.max(0, standardDeviation(means) ** 2 - within * means.length / values.length);
  return between === 0 ? 0 : between / (between + within);
}
