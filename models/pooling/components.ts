// Pure: no I/O, no clock, no hidden randomness.
import { type Forest, LEVELS } from "./forest.ts";
import { type EffectPrior, logLikelihood } from "./fixed_effects.ts";
import { maximise, type Maximum } from "./_maximise.ts";
import type { Spread } from "./inherit.ts";
import { sweepFor, sweepInto, type Variances } from "./sweep.ts";

/**
 * Prior of the standard deviations of the effects: log-normal and independent, in the order of {@link LEVELS}.
 * A standard deviation of 0 says that there is no such effect, and it stays 0.
 */
export interface SpreadPrior {
  /** Root mean square of the prior. */
  readonly sd: readonly number[];
  /** Standard deviation of ln σ. */
  readonly logSd: number;
}

/**
 * Spreads stated by a platform as a prior that weighs as much as `degrees` degrees of freedom: the logarithm of a
 * standard deviation estimated from ν of them is uncertain by about 1/√(2ν). With 2: a factor of e^(±1) either way at 95 %.
 * The prior is placed so that the mean of σ² is the stated sd² (E e^(2x) = e^(2c + 2s²)): with nothing read, a guide is
 * as uncertain as the platform says.
 */
export function spreadPrior({ lotSd, waferSd, dieSd, guideSd }: Spread, degrees: number): SpreadPrior {
  const sd = [lotSd, waferSd, dieSd, guideSd];
  if (!(degrees > 0) || sd.some((s) => !(s >= 0 && s < Infinity))) {
    throw new RangeError(
      `Cannot make a prior of spreads ${
        sd.join(", ")
      } with ${degrees} degrees of freedom: need both ≥ 0, finite`,
    );
  }
  return { sd, logSd: 1 / Math.sqrt(2 * degrees) };
}

/** Levels whose standard deviation is not stated to be 0. */
export const openLevels = (prior: SpreadPrior): number[] =>
  LEVELS.map((_, i) => i).filter((i) => prior.sd[i]! > 0);

/** Centre of ln σ for the open levels. */
export const priorCentre = (prior: SpreadPrior): Float64Array =>
  Float64Array.from(openLevels(prior), (i) => Math.log(prior.sd[i]!) - prior.logSd ** 2);

/** Variances from logarithms of the standard deviations of the open levels. */
export function variancesAt(logSd: ArrayLike<number>, open: readonly number[]): Variances {
  const out: [number, number, number, number] = [0, 0, 0, 0];
  open.forEach((level, i) => out[level] = Math.exp(2 * logSd[i]!));
  return out;
}

/** ln of the posterior density of the log standard deviations (fixed effects integrated), up to a constant. */
export function spreadDensity(
  forest: Forest,
  prior: SpreadPrior,
  effects: EffectPrior,
): (logSd: ArrayLike<number>) => number {
  const open = openLevels(prior);
  const centre = priorCentre(prior);
  const sweep = sweepFor(forest);
  return (x) => {
    let log = logLikelihood(sweepInto(forest, variancesAt(x, open), sweep), effects);
    for (let i = 0; i < open.length; i++) log -= 0.5 * ((x[i]! - centre[i]!) / prior.logSd) ** 2;
    return log;
  };
}

/** The most probable spreads, and the logarithm of the evidence for the model in Laplace's approximation. */
export interface SpreadMode extends Maximum {
  readonly logEvidence: number;
}

/** @param start where to begin; the centre of the prior if left out */
export function spreadMode(
  density: (logSd: ArrayLike<number>) => number,
  prior: SpreadPrior,
  start: ArrayLike<number> = priorCentre(prior),
): SpreadMode {
  const found = maximise(density, start, { gain: 1e-4 });
  const logVolume = found.curvature.reduce(
    (sum, c) => sum + 0.5 * Math.log(2 * Math.PI / curvatureAtLeast(c, prior)),
    0,
  );
  return { ...found, logEvidence: found.value + logVolume };
}

/** The likelihood can be flat along an axis, the prior never is: a quarter of its curvature bounds rounding from below. */
export const curvatureAtLeast = (curvature: number, prior: SpreadPrior): number =>
  Math.max(curvature, 0.25 / prior.logSd ** 2);
