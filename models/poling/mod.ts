// Pure: no I/O, no clock, no hidden randomness.
export * from "./acceptance.ts";
export * from "./closed_forms.ts";
export * from "./envelope.ts";
export * from "./grating.ts";
export * from "./interpolate.ts";
export { phaseMatchingTemperatures, type Temperatures } from "./operation.ts";
export * from "./peak.ts";
export { checkProfile, type MismatchProfile } from "./profile.ts";
export * from "./realise.ts";
export * from "./realise_mismatch.ts";
export { gratingSpectrum } from "./spectrum.ts";
export { gratingSpectrumDirect } from "./spectrum_direct.ts";
export type { GratingSpectrum, SpectrumOptions } from "./spectrum_setting.ts";
export * from "./walls.ts";
