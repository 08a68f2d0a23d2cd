// Pure: no I/O, no clock, no hidden randomness.
import { standardDeviation } from "../../shared/statistics.ts";
import { variancesAt } from "./components.ts";
import { fixedEffects, logLikelihood } from "./fixed_effects.ts";
import { type Forest, forestOf, leavesOf, type Level, LEVELS, type LotObservation } from "./forest.ts";
import { maximise } from "./_maximise.ts";
import { sweepFor, sweepInto, type Variances } from "./sweep.ts";

/** Variance components as the readings alone give them. */
export interface RemlEstimate {
  /** Variances of the effects by level; 0 where it was not asked for, or where the likelihood is highest at 0. */
  readonly variances: Variances;
  readonly mean: number;
  /** Standard uncertainty of the mean, the variances taken as known. */
  readonly uMean: number;
  readonly converged: boolean;
}

/**
 * Restricted maximum likelihood of nested effects with known reading variances, without any prior (H. D. Patterson &
 * R. Thompson, Biometrika 58, 545 (1971)). Readings with u = 0 are exact: then the guides' variance is the residual one.
 * @param levels the effects to estimate
 * @throws RangeError for fewer than 2 units, or when all read the same
 */
export function reml(observations: readonly LotObservation[], levels: readonly Level[]): RemlEstimate {
  const values = observations.map((o) => o.value);
  const scale = standardDeviation(values);
  if (!(scale > 0)) {
    throw new RangeError(
      `Cannot estimate variances from ${values.length} readings: need 2 or more that differ`,
    );
  }
  const centre = values[0]!;
  const leaves = leavesOf(observations, scale);
  const forest = forestOf(leaves, 2, (leaf) => [(leaf.value - centre) / scale, 1]);
  forest.variance.forEach((v, k) => forest.variance[k] = v / scale ** 2);
  const effects = { mean: [0], sd: [Infinity] };
  let open = LEVELS.map((_, i) => i).filter((i) => levels.includes(LEVELS[i]!));
  let start = open.map(() => -0.5 * Math.log(open.length));
  for (;;) {
    const found = climb(forest, open, start);
    const zero = open.findIndex((_, i) =>
      found.likelihood(open.toSpliced(i, 1), found.at.toSpliced(i, 1)) >= found.value - 1e-9
    );
    if (zero < 0) {
      const variances = variancesAt(found.at, open);
      const { estimate, covariance } = fixedEffects(sweepInto(forest, variances, sweepFor(forest)), effects);
      return {
        variances: variances.map((v) => v * scale ** 2) as unknown as Variances,
        mean: centre + scale * estimate[0]!,
        uMean: scale * Math.sqrt(covariance[0]!),
        converged: found.converged,
      };
    }
    // The likelihood does not fall when this effect goes: its estimate is 0, and the others are sought without it.
    open = open.toSpliced(zero, 1);
    start = found.at.toSpliced(zero, 1);
  }
}

function climb(forest: Forest, open: readonly number[], start: readonly number[]) {
  const sweep = sweepFor(forest);
  const effects = { mean: [0], sd: [Infinity] };
  const likelihood = (levels: readonly number[], x: ArrayLike<number>) =>
    logLikelihood(sweepInto(forest, variancesAt(x, levels), sweep), effects);
  const { at, value, converged } = maximise((x) => likelihood(open, x), start, { gain: 1e-15, most: 100 });
  return { at: [...at], value, converged, likelihood };
}
