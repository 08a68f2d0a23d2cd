// Pure: no I/O, no clock, no hidden randomness.

/** g(z) = amplitude·e^{−decay·z}, z in m from the input facet: how loss weighs what is generated at z. */
export interface LossWeight {
  /** 1/m; negative when the output loses more than the inputs do. */
  readonly decay: number;
  /** g at the input facet. */
  readonly amplitude: number;
}

/**
 * Second harmonic at the output facet: g = exp(−α₁z − α₂(L_g−z)/2), so decay α₁ − α₂/2 and amplitude exp(−α₂L_g/2).
 * @param alphas power attenuations (1/m) of both fundamental fields (type 0: the same twice; α₁ is their mean) and of
 *   the harmonic
 * @param guideLength L_g, m: the whole guide, not the poled length
 * @throws RangeError for a number that is not finite, or a length that is not positive
 */
export function secondHarmonicWeight(
  alphas: { readonly s: number; readonly i: number; readonly p: number },
  guideLength: number,
): LossWeight {
  return weight(alphas.s + alphas.i, alphas.p, guideLength);
}

/**
 * Sum or difference frequency at the output facet: g = exp(−(α_a+α_b)z/2 − α_out(L_g−z)/2).
 * @param alphas power attenuations (1/m) of the two inputs and of the output
 * @param guideLength L_g, m: the whole guide, not the poled length
 * @throws RangeError for a number that is not finite, or a length that is not positive
 */
export function mixingWeight(
  alphas: { readonly a: number; readonly b: number; readonly out: number },
  guideLength: number,
): LossWeight {
  return weight(alphas.a + alphas.b, alphas.out, guideLength);
}

/**
 * Pairs as generated: g = exp(−α_p z/2). Signal and idler loss enter once, through their survival, and not here.
 * @param alphaPump power attenuation of the pump, 1/m
 * @throws RangeError for a number that is not finite
 */
export function pairWeight(alphaPump: number): LossWeight {
  if (!Number.isFinite(alphaPump)) {
    throw new RangeError(`Cannot weigh by loss: found pump attenuation ${alphaPump}, need a finite number`);
  }
  return { decay: alphaPump / 2, amplitude: 1 };
}

// A harmonic weighs as a mixing of its two fundamental fields: exp(−α₁z) is the product of two e^{−αz/2}.
function weight(alphaInputs: number, alphaOut: number, guideLength: number): LossWeight {
  if (!Number.isFinite(alphaInputs) || !Number.isFinite(alphaOut)) {
    throw new RangeError(
      `Cannot weigh by loss: found attenuations ${alphaInputs} and ${alphaOut}, need finite numbers`,
    );
  }
  if (!(guideLength > 0 && guideLength < Infinity)) {
    throw new RangeError(
      `Cannot weigh by loss: found guide length ${guideLength} m, need a finite number > 0`,
    );
  }
  return { decay: (alphaInputs - alphaOut) / 2, amplitude: Math.exp(-alphaOut * guideLength / 2) };
}
