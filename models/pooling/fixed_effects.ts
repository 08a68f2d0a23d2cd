// Pure: no I/O, no clock, no hidden randomness.
import { backwardInPlace, factorInPlace, forwardInPlace } from "./_cholesky.ts";
import type { Sweep } from "./sweep.ts";

/** Normal priors of the fixed effects, independent; an infinite standard deviation is no prior at all. */
export interface EffectPrior {
  readonly mean: readonly number[];
  readonly sd: readonly number[];
}

/** Fixed effects given the variances. */
export interface FixedEffects {
  /** ln of the likelihood with the fixed effects integrated over their prior, up to a constant. */
  readonly logLikelihood: number;
  readonly estimate: Float64Array;
  /** Covariance, row-major. */
  readonly covariance: Float64Array;
}

/**
 * Generalised least squares from a sweep whose column 0 is the value and whose others are the design. Without priors the
 * likelihood is the restricted one (H. D. Patterson & R. Thompson, Biometrika 58, 545 (1971)).
 * @throws RangeError when the readings leave an effect without a prior open
 */
export function fixedEffects(sweep: Sweep, prior: EffectPrior): FixedEffects {
  const { lower, whitened, logLikelihood } = solveEffects(sweep, prior);
  const p = whitened.length;
  backwardInPlace(lower, p, whitened);
  const covariance = new Float64Array(p * p);
  for (let j = 0; j < p; j++) {
    const column = new Float64Array(p);
    column[j] = 1;
    forwardInPlace(lower, p, column);
    backwardInPlace(lower, p, column);
    covariance.set(column, j * p);
  }
  return { logLikelihood, estimate: whitened, covariance };
}

/** Only the likelihood of {@link fixedEffects}. */
export const logLikelihood = (sweep: Sweep, prior: EffectPrior): number =>
  solveEffects(sweep, prior).logLikelihood;

/** Normal equations A β = b with the prior added, factored: A = LLᵀ; `whitened` is L⁻¹b. */
function solveEffects({ cross, logDet }: Sweep, { mean, sd }: EffectPrior) {
  const p = mean.length;
  const q = p + 1;
  const lower = new Float64Array(p * p);
  const whitened = new Float64Array(p);
  let quadratic = cross[0]!;
  let logPrior = 0;
  for (let i = 0; i < p; i++) {
    const precision = 1 / sd[i]! ** 2;
    for (let j = i; j < p; j++) lower[j * p + i] = cross[(i + 1) * q + j + 1]!;
    lower[i * p + i]! += precision;
    whitened[i] = cross[i + 1]! + precision * mean[i]!;
    quadratic += precision * mean[i]! ** 2;
    if (precision > 0) logPrior += Math.log(precision);
  }
  const logNormal = factorInPlace(lower, p);
  if (Number.isNaN(logNormal)) {
    throw new RangeError(`Cannot estimate ${p} fixed effects: the readings leave one open, need a prior`);
  }
  forwardInPlace(lower, p, whitened);
  let explained = 0;
  for (let i = 0; i < p; i++) explained += whitened[i]! ** 2;
  return {
    lower,
    whitened,
    logLikelihood: -0.5 * (logDet + logNormal - logPrior + quadratic - explained),
  };
}
