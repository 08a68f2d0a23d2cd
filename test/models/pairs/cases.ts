// Sources that several tests share.
import { refractiveIndex } from "../../../models/materials/mod.ts";
import { type GratingSpectrum, gratingSpectrum, uniformGrating } from "../../../models/poling/mod.ts";
import { type PairSource, pulse, type PumpSpectrum } from "../../../models/pairs/mod.ts";
import { SPEED_OF_LIGHT } from "../../../shared/constants.ts";
import { omegaOf } from "../../../shared/units.ts";

type MismatchBand = { readonly first: number; readonly step: number; readonly count: number };

/** ψ given as a function of Δβ − Δβ₀, for sources with a closed form. */
export function analyticSpectrum(psi: (x: number) => [number, number], peakAt: number, centre = 0) {
  return ({ first, step, count }: MismatchBand): GratingSpectrum => {
    const re = new Float64Array(count);
    const im = new Float64Array(count);
    for (let k = 0; k < count; k++) [re[k], im[k]] = psi(first + k * step - peakAt) as [number, number];
    return { first, step, re, im, centre };
  };
}

export const sinc = (x: number): number => x === 0 ? 1 : Math.sin(x) / x;

/**
 * Linear dispersion, so that Δβ − Δβ₀ = a_s·ν_s + a_i·ν_i with a_s = k′_p − k′_s and a_i = k′_p − k′_i, about a
 * degenerate pair at 1582 nm.
 */
export function linearSource(
  over: Partial<PairSource> & {
    aS: number;
    aI: number;
    psi: (x: number) => [number, number];
    centre?: number;
  },
): PairSource {
  const { aS, aI, psi, centre, ...rest } = over;
  const omegaP = omegaOf(791e-9);
  const half = omegaP / 2;
  const k0 = 1.8 * omegaP / SPEED_OF_LIGHT;
  const delay = 1.8 / SPEED_OF_LIGHT;
  const mismatch = 136_000;
  return {
    omegaP,
    omegaS: half,
    omegaI: half,
    kP: (w) => k0 + delay * (w - omegaP),
    kS: (w) => k0 / 2 - mismatch / 2 + (delay - aS) * (w - half),
    kI: (w) => k0 / 2 - mismatch / 2 + (delay - aI) * (w - half),
    samePolarisation: false,
    d: 3.9e-12,
    effectiveArea: 40e-12,
    length: 0.01,
    spectrum: analyticSpectrum(psi, mismatch, centre),
    pump: pulses(pulse("gaussian", 1e-12, 791e-9)),
    ...rest,
  };
}

export const pulses = (spectrum: PumpSpectrum, averagePower = 1e-4): PairSource["pump"] => ({
  kind: "pulsed",
  spectrum,
  averagePower,
  repetition: 76e6,
});

/** Bulk KTP, type II (TE > TE + TM = y > y + z), uniformly poled at the period that is phase matched at 25 °C. */
export function ktpSource(over: Partial<PairSource> & { lambdaP?: number } = {}): PairSource {
  const { lambdaP = 791.09e-9, ...rest } = over;
  const length = rest.length ?? 0.01;
  const k = (axis: "y" | "z") => (w: number) =>
    refractiveIndex("KTP", axis, 2 * Math.PI * SPEED_OF_LIGHT / w, 25) * w / SPEED_OF_LIGHT;
  const omegaP = omegaOf(lambdaP);
  const omegaS = rest.omegaS ?? omegaP / 2;
  const omegaI = omegaP - omegaS;
  const mismatch = k("y")(omegaP) - k("y")(omegaS) - k("z")(omegaI);
  const grating = uniformGrating({ start: 0, length, period: 2 * Math.PI / Math.abs(mismatch) });
  return {
    omegaP,
    omegaS,
    omegaI,
    kP: k("y"),
    kS: k("y"),
    kI: k("z"),
    samePolarisation: false,
    d: 3.92e-12,
    effectiveArea: 40e-12,
    length,
    spectrum: (band) => gratingSpectrum(grating, band),
    pump: pulses(pulse("gaussian", 1e-12, lambdaP)),
    ...rest,
  };
}
