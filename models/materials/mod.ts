// Pure: no I/O, no clock, no hidden randomness.
// Bulk crystals: indices, thermal expansion, nonlinear coefficients.
export { expansionFactor } from "./expansion.ts";
export {
  millerScaled,
  type NonlinearCoefficient,
  type ProcessAxes,
  type ProcessWavelengths,
  SHOJI_COEFFICIENTS,
} from "./nonlinear.ts";
export {
  type CrystalAxis,
  groupIndex,
  indexSource,
  type Material,
  materialRange,
  MATERIALS,
  publishedRangeRemark,
  refractiveIndex,
} from "./refractive_index.ts";
export { SELLMEIER_SETS, type SellmeierId, type SellmeierSet } from "./sellmeier_sets.ts";
