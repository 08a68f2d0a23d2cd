// Pure: no I/O, no clock, no hidden randomness.
import { type Band, checkGrating, type Grating } from "./grating.ts";
import { checkProfile, type MismatchProfile } from "./profile.ts";

/**
 * φ of a grating on a uniform Δβ grid, with the fast phase of its middle taken out:
 * φ(Δβ_k) = exp(i·Δβ_k·centre)·(re_k + i·im_k), Δβ_k = first + k·step in 1/m, centre in m.
 */
export interface GratingSpectrum {
  readonly first: number;
  readonly step: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly centre: number;
}

export interface SpectrumOptions {
  /** Amplitude decay g(z) = e^(−decay·z), 1/m, z from the input facet; either sign. Default 0. */
  readonly decay?: number;
  /** Mismatch error δβ(z) along the guide. Default none. */
  readonly profile?: MismatchProfile;
  /** Length at temperature / length at 25 °C; multiplies every z of grating and profile, and L. Default 1. */
  readonly scale?: number;
  /** L at 25 °C in m. Default end − start. */
  readonly poledLength?: number;
}

/** Options with the defaults filled in. */
export interface SpectrumSetting {
  readonly decay: number;
  readonly scale: number;
  /** L·scale, m. */
  readonly length: number;
  /** Scaled middle of the section, m. */
  readonly centre: number;
  readonly profile: MismatchProfile | undefined;
}

/** Throws a RangeError for anything that cannot be transformed. */
export function checkSpectrumInput(grating: Grating, band: Band, options: SpectrumOptions): SpectrumSetting {
  checkGrating(grating);
  const { first, step, count } = band;
  if (
    !(Number.isFinite(first) && Number.isFinite(step) && step > 0 && Number.isSafeInteger(count) &&
      count >= 1)
  ) {
    throw new RangeError(
      `Cannot transform a grating on the band first ${first}, step ${step}, count ${count}: ` +
        "need a finite start, a step > 0 and a count >= 1",
    );
  }
  const decay = options.decay ?? 0;
  const scale = options.scale ?? 1;
  const length = options.poledLength ?? grating.end - grating.start;
  if (!Number.isFinite(decay)) {
    throw new RangeError(`Cannot transform a grating with decay ${decay} 1/m: need a finite number`);
  }
  if (!(scale > 0 && Number.isFinite(scale))) {
    throw new RangeError(`Cannot transform a grating stretched by ${scale}: need a finite factor > 0`);
  }
  if (!(length > 0 && Number.isFinite(length))) {
    throw new RangeError(`Cannot transform a grating of poled length ${length} m: need a finite length > 0`);
  }
  if (options.profile !== undefined) checkProfile(options.profile);
  return {
    decay,
    scale,
    length: length * scale,
    centre: scale * (grating.start + grating.end) / 2,
    profile: options.profile,
  };
}
