// Pure: no I/O, no clock, no hidden randomness.
import type { Process } from "../../shared/vocabulary.ts";
import { type LitGuide, omegas, requireLitGuide, type WaveValues } from "./three_waves.ts";

export type ConversionProcess = Exclude<Process, "pair-generation">;

/** Photons of a weak input without a stated power, per photon of the strong one: too few to deplete it. */
const PROBE = 1e-12;

/**
 * Fraction of the weaker input's photons at the input facet that are converted and leave by the output facet, with
 * depletion and loss: second harmonic P₂/P₁ (two photons become one), sum frequency N_p/min(N_s, N_i), difference
 * frequency N_i/min(N_p, N_s), which parametric gain can lift above 1. An input without power counts as a probe too
 * weak to deplete the other.
 * @param integrate powers at the output facet of the same guide with these powers at its input:
 *   `(lit) => integrateUniform(lit, section, kernel)` or `(lit) => integrateDomains(lit, grating, deltaBeta)`
 * @throws RangeError if neither input has power, or the made wave has
 */
export function peakConversion(
  process: ConversionProcess,
  guide: LitGuide,
  integrate: (lit: LitGuide) => WaveValues,
): number {
  requireLitGuide(guide);
  const omega = omegas(guide.waves);
  const [first, second, made] = process === "difference-frequency"
    ? ["p", "s", "i"] as const
    : ["s", "i", "p"] as const;
  if (guide.power[made] !== 0) {
    throw new RangeError(`Cannot convert: found ${guide.power[made]} W in the wave that is made, need 0 W`);
  }
  let photonsA = guide.power[first] / omega[first];
  let photonsB = guide.power[second] / omega[second];
  if (photonsA === 0 && photonsB === 0) {
    throw new RangeError("Cannot convert: found no power in either input, need power in one");
  }
  if (process === "second-harmonic") {
    if (guide.power.s !== guide.power.i) {
      throw new RangeError(
        `Cannot take a second harmonic: found powers ${guide.power.s} and ${guide.power.i} W, need two equal halves`,
      );
    }
    return integrate(guide).p / (guide.power.s + guide.power.i);
  }
  if (photonsA === 0) photonsA = PROBE * photonsB;
  if (photonsB === 0) photonsB = PROBE * photonsA;
  const power = {
    ...guide.power,
    [first]: photonsA * omega[first],
    [second]: photonsB * omega[second],
  };
  const out = integrate({ ...guide, power });
  return out[made] / omega[made] / Math.min(photonsA, photonsB);
}
