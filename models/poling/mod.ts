// Pure: no I/O, no clock, no hidden randomness.
export * from "./grating.ts";
export { checkProfile, type MismatchProfile } from "./profile.ts";
export { gratingSpectrum } from "./spectrum.ts";
export { gratingSpectrumDirect } from "./spectrum_direct.ts";
export type { GratingSpectrum, SpectrumOptions } from "./spectrum_setting.ts";
