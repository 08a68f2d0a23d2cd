// Pure: no I/O, no clock, no hidden randomness.
import { CholeskyDecomposition, Matrix } from "ml-matrix";
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
  const { factor, right, logLikelihood } = solveEffects(sweep, prior);
  const p = right.rows;
  const estimate = factor.solve(right).to1DArray();
  const covariance = p === 0 ? [] : factor.solve(Matrix.eye(p)).to1DArray();
  return { logLikelihood, estimate: Float64Array.from(estimate), covariance: Float64Array.from(covariance) };
}

/** Only the likelihood of {@link fixedEffects}. */
export const logLikelihood = (sweep: Sweep, prior: EffectPrior): number =>
  solveEffects(sweep, prior).logLikelihood;

function solveEffects({ cross, logDet }: Sweep, { mean, sd }: EffectPrior) {
  const p = mean.length;
  const q = p + 1;
  const normal = new Matrix(p, p);
  const right = new Matrix(p, 1);
  let quadratic = cross[0]!;
  let logPrior = 0;
  for (let i = 0; i < p; i++) {
    const precision = 1 / sd[i]! ** 2;
    for (let j = i; j < p; j++) {
      const x = cross[(i + 1) * q + j + 1]! + (i === j ? precision : 0);
      normal.set(i, j, x);
      normal.set(j, i, x);
    }
    right.set(i, 0, cross[i + 1]! + precision * mean[i]!);
    quadratic += precision * mean[i]! ** 2;
    if (precision > 0) logPrior += Math.log(precision);
  }
  const factor = new CholeskyDecomposition(normal);
  if (!factor.isPositiveDefinite()) {
    throw new RangeError(`Cannot estimate ${p} fixed effects: the readings leave one open, need a prior`);
  }
  const lower = factor.lowerTriangularMatrix;
  // bᵀA⁻¹b = |L⁻¹b|², by forward substitution.
  const y = new Float64Array(p);
  let explained = 0;
  let logNormal = 0;
  for (let i = 0; i < p; i++) {
    let t = right.get(i, 0);
    for (let j = 0; j < i; j++) t -= lower.get(i, j) * y[j]!;
    y[i] = t / lower.get(i, i);
    explained += y[i]! ** 2;
    logNormal += 2 * Math.log(lower.get(i, i));
  }
  return {
    factor,
    right,
    logLikelihood: -0.5 * (logDet + logNormal - logPrior + quadratic - explained),
  };
}
