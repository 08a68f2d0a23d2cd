// Pure: no I/O, no clock, no hidden randomness.
export * from "./conformity.ts";
export { windowStatistics } from "./grating_draws.ts";
export { mismatchProfile } from "./mismatch_profile.ts";
export {
  matchingPeriod,
  nonCriticalWidths,
  type Nudge,
  type NudgeEffect,
  nudgeEffects,
  NUDGES,
  parameterSlope,
  type SensitivityPoint,
} from "./design_sensitivity.ts";
export * from "./draws.ts";
export * from "./figure_basis.ts";
export * from "./guide_inputs.ts";
export { type OperatingPoint, operatingPoints, type OperatingQuestion } from "./operating_point.ts";
export type { RecordedSpectrum } from "./pair_prediction.ts";
export { type GuideSample, sampleGuide, type SampleOptions } from "./guide_sample.ts";
export { type TraitColumn } from "./drawn_traits.ts";
export { platformDesign, processRemarks } from "./platform_design.ts";
export { type PlatformModel, platformModel, validTemperatures } from "./platform_model.ts";
export {
  type GuidePrediction,
  type PredictedFigure,
  predictGuide,
  type PredictOptions,
} from "./predict_guide.ts";
