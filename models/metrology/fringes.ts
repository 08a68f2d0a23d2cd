// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";
import type { Refused } from "./refusal.ts";

/** Propagation loss from the fringes of a guide as a resonator between its own facets. */
export interface FringeLoss {
  /** Power attenuation α, 1/m. */
  readonly alpha: Uncertain;
  /** Contrast that a lossless guide with these facets would show: the bound. */
  readonly losslessContrast: number;
  /** Parts of u(α), 1/m, signed: what one standard uncertainty of each input does. Readings of guides that share
   * facets share the reflectivity's part. */
  readonly parts: { readonly contrast: number; readonly reflectivity: number; readonly length: number };
}

/**
 * R̃ = R·e^{−αL} from the contrast K = 2R̃/(1+R̃²): (1 − √(1−K²))/K, written as K/(1 + √(1−K²)) so that a faint
 * contrast does not cancel.
 */
export function reducedReflectivity(contrast: number): number {
  return contrast / (1 + Math.sqrt((1 - contrast) * (1 + contrast)));
}

/**
 * α = ln(R/R̃)/L from the fringe contrast K = (T_max−T_min)/(T_max+T_min) (R. Regener & W. Sohler, Appl. Phys. B 36,
 * 143 (1985)). Its u to first order in K, R and L, taken as independent. A contrast above the lossless bound
 * 2R/(1+R²) is refused: the guide would amplify, so reading and reflectivity contradict each other.
 * @param contrast K, 0…1
 * @param reflectivity R = √(R_in·R_out) at this wavelength: `meanReflectivity()`
 * @param length L, m
 * @throws RangeError for a number that is not finite, a negative u, R outside 0…1 or a length that is not positive
 */
export function fringeLoss(
  contrast: Uncertain,
  reflectivity: Uncertain,
  length: Uncertain,
): FringeLoss | Refused {
  const all = { contrast, reflectivity, length };
  for (const [name, { value, u }] of Object.entries(all)) {
    if (!Number.isFinite(value) || !(u >= 0 && u < Infinity)) {
      throw new RangeError(
        `Cannot read fringes: found ${name} ${value}, u ${u}, need finite numbers, u >= 0`,
      );
    }
  }
  const K = contrast.value;
  const R = reflectivity.value;
  const L = length.value;
  if (!(R > 0 && R < 1)) throw new RangeError(`Cannot read fringes: found reflectivity ${R}, need 0 < R < 1`);
  if (!(L > 0)) throw new RangeError(`Cannot read fringes: found length ${L} m, need > 0`);
  if (!(K > 0)) return { refused: `fringe contrast ${K}: no fringes, so no upper bound on the loss` };
  const bound = 2 * R / (1 + R * R);
  // Contrast at the bound to rounding is a lossless guide.
  if (K > bound * (1 + 1e-12)) {
    return {
      refused: `fringe contrast ${K} above ${
        bound.toPrecision(6)
      }, the bound of a lossless guide with facets of ${R.toPrecision(6)}`,
    };
  }
  const lnRatio = Math.log(R / reducedReflectivity(K));
  const parts = {
    // d ln R̃/dK = 1/(K√(1−K²))
    contrast: -contrast.u / (K * Math.sqrt((1 - K) * (1 + K)) * L),
    reflectivity: reflectivity.u / (R * L),
    length: -lnRatio / L * length.u / L,
  };
  return {
    alpha: { value: lnRatio / L, u: Math.hypot(parts.contrast, parts.reflectivity, parts.length) },
    losslessContrast: bound,
    parts,
  };
}

/**
 * R = √(R_in·R_out) of a guide's two facets. Facets of one polish or one coating run err together: correlation 1,
 * where relative uncertainties add in full; independent facets: 0.
 * @throws RangeError unless both are in 0…1 and the correlation in −1…1
 */
export function meanReflectivity(facetIn: Uncertain, facetOut: Uncertain, correlation: number): Uncertain {
  for (const { value, u } of [facetIn, facetOut]) {
    if (!(value > 0 && value <= 1) || !(u >= 0 && u < Infinity)) {
      throw new RangeError(`Cannot average reflectivities: found ${value}, u ${u}, need 0 < R <= 1, u >= 0`);
    }
  }
  if (!(Math.abs(correlation) <= 1)) {
    throw new RangeError(`Cannot average reflectivities: found correlation ${correlation}, need −1…1`);
  }
  const value = Math.sqrt(facetIn.value * facetOut.value);
  const [a, b] = [facetIn.u / facetIn.value / 2, facetOut.u / facetOut.value / 2];
  // (a + b)² at correlation 1 and (a − b)² at −1 may round below zero
  return { value, u: value * Math.sqrt(Math.max(0, a * a + b * b + 2 * correlation * a * b)) };
}
