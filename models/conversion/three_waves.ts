// Pure: no I/O, no clock, no hidden randomness.
import { omegaOf } from "../../shared/units.ts";
import type { ThreeWaves } from "../../shared/vocabulary.ts";

/** One number for each of the three waves. */
export interface WaveValues {
  readonly p: number;
  readonly s: number;
  readonly i: number;
}

/**
 * A guide with light in it. A second harmonic is the sum frequency of two halves of the fundamental: give
 * `power` {p: 0, s: P₁/2, i: P₁/2}, for type 0 (both halves the same field, so α_s = α_i) as for type II.
 */
export interface LitGuide {
  /** Vacuum wavelengths, m. */
  readonly waves: ThreeWaves;
  /** g of the photon-flux amplitudes, √(1/(W·s))·(1/m): `photonCoupling()`. */
  readonly coupling: number;
  /** Power attenuations, 1/m. */
  readonly alpha: WaveValues;
  /** Powers just behind the input facet, W; the wave that is made has none. */
  readonly power: WaveValues;
  /** L_g from facet to facet at 25 °C, m. */
  readonly guideLength: number;
}

/** Angular frequencies of the three waves, rad/s. */
export function omegas(waves: ThreeWaves): WaveValues {
  return { p: omegaOf(waves.lambdaP), s: omegaOf(waves.lambdaS), i: omegaOf(waves.lambdaI) };
}

/**
 * Refuses what the coupled equations cannot start from.
 * @throws RangeError for a number that is not finite, negative power or coupling, or power in all three waves
 */
export function requireLitGuide({ coupling, alpha, power, guideLength }: LitGuide): void {
  if (!(coupling >= 0 && coupling < Infinity)) refuse("coupling", coupling, "a finite number >= 0");
  if (!(guideLength > 0 && guideLength < Infinity)) refuse("guideLength", guideLength, "a finite number > 0");
  for (const wave of ["p", "s", "i"] as const) {
    if (!Number.isFinite(alpha[wave])) refuse(`alpha.${wave}`, alpha[wave], "a finite number");
    if (!(power[wave] >= 0 && power[wave] < Infinity)) {
      refuse(`power.${wave}`, power[wave], "a finite number >= 0");
    }
  }
  if (power.p > 0 && power.s > 0 && power.i > 0) {
    // Then the answer hangs on a relative phase that nobody measures.
    throw new RangeError(
      "Cannot convert: found power in all three waves, need none in the wave that is made",
    );
  }
}

function refuse(name: string, found: number, need: string): never {
  throw new RangeError(`Cannot convert: found ${name} = ${found}, need ${need}`);
}
