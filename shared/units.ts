// Pure: no I/O, no clock, no hidden randomness.
// Units are converted here, at the border: files and output carry nm, mm, dB/cm …; models/ works in SI.
import { SPEED_OF_LIGHT } from "./constants.ts";

/** nanometres → metres. */
export const nm = (x: number): number => x * 1e-9;
/** micrometres → metres. */
export const um = (x: number): number => x * 1e-6;
/** millimetres → metres. */
export const mm = (x: number): number => x * 1e-3;
/** metres → nanometres. */
export const toNm = (x: number): number => x * 1e9;
/** metres → micrometres. */
export const toUm = (x: number): number => x * 1e6;

/** Loss in dB/cm → power attenuation α in 1/m: 100·ln(10)/10 per dB/cm. */
export const dbPerCm = (x: number): number => x * 10 * Math.LN10;
/** Power attenuation α in 1/m → loss in dB/cm. */
export const toDbPerCm = (alpha: number): number => alpha / (10 * Math.LN10);

/** Vacuum wavelength (m) ↔ angular frequency (rad/s): the relation is its own inverse. */
export const omegaOf = (lambda: number): number => 2 * Math.PI * SPEED_OF_LIGHT / lambda;
/** Angular frequency (rad/s) → vacuum wavelength (m). */
export const lambdaOf = (omega: number): number => 2 * Math.PI * SPEED_OF_LIGHT / omega;

/** Efficiency 1/W → %/W. */
export const toPercentPerW = (x: number): number => 100 * x;
/** Normalised efficiency 1/(W·m²) → %/(W·cm²). */
export const toPercentPerWCm2 = (x: number): number => x * 100 * 1e-4;
