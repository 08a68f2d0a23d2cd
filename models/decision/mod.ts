// Pure: no I/O, no clock, no hidden randomness.
export * from "./conformity.ts";
export { windowStatistics } from "./grating_draws.ts";
export { mismatchProfile } from "./mismatch_profile.ts";
export {
  matchingPeriod,
  type Nudge,
  type NudgeEffect,
  nudgeEffects,
  NUDGES,
  type SensitivityPoint,
} from "./design_sensitivity.ts";
export { type NonCriticalWidth, nonCriticalWidths, parameterSlope } from "./parameter_slope.ts";
export { type ChangedDesign, changedDesigns, PROCESS_NUDGES, type ProcessNudge } from "./process_changes.ts";
export * from "./analyse_guide.ts";
export * from "./explain_guide.ts";
export { type KnownReadingU, type PossibleReading, type ReadingU } from "./possible_readings.ts";
export { RESTORE_GROUP_NAMES, restoredInputs, type RestoreGroup } from "./restored_inputs.ts";
export * from "./draws.ts";
export * from "./figure_basis.ts";
export * from "./guide_inputs.ts";
export { otherScanTrait } from "./other_scan.ts";
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
