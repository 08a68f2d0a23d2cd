// Pure: no I/O, no clock, no hidden randomness.
import { SPEED_OF_LIGHT, VACUUM_PERMITTIVITY } from "../../shared/constants.ts";
import { omegaOf } from "../../shared/units.ts";
import type { ThreeWaves } from "../../shared/vocabulary.ts";

/** Effective indices of the three waves. */
export interface ThreeIndices {
  readonly p: number;
  readonly s: number;
  readonly i: number;
}

/** What fixes the strength of a three-wave process in one guide. */
export interface Strength {
  /** Vacuum wavelengths (m) with 1/λ_p = 1/λ_s + 1/λ_i. */
  readonly waves: ThreeWaves;
  readonly n: ThreeIndices;
  /** The crystal's coefficient d at these wavelengths, m/V; 2/π is not in it: the domain signs carry that. */
  readonly d: number;
  /** A_eff = 1/|∬ e_p e_s e_i dx dy|² with ∬ e² dx dy = 1, m². */
  readonly effectiveArea: number;
}

// Fields ½[E e^{i(βz−ωt)} + c.c.] and P = ε₀·2d·E² give dE₃/dz = i(ω₃d/n₃c)·E₁E₂ for distinct inputs and half of
// that, dE₂/dz = i(ω₂d/2n₂c)·E₁² = i(ωd/n₂c)·E₁², for the harmonic of ω. With power ½ε₀cn|E|²·area both become
// P_out = 2ω̂²d²/(ε₀c³·n·n·n·A_eff)·P·P·L², where ω̂ is ω_out for distinct inputs and the fundamental's for a harmonic.

/**
 * η₀ of the second harmonic, P₂ = η₀·L²|φ|²·P₁², in 1/(W·m²): 2ω²d²/(ε₀c³n_s n_i n_p A_eff), ω the fundamental.
 * Type II (signal and idler polarised differently) takes the total fundamental power split equally in two.
 * @throws RangeError if signal and idler differ in wavelength, or a value is not positive
 */
export function secondHarmonicPrefactor(strength: Strength): number {
  const { lambdaS, lambdaI } = strength.waves;
  if (!(Math.abs(lambdaS - lambdaI) <= 1e-9 * lambdaS)) {
    throw new RangeError(
      `Cannot take a second harmonic: found inputs at ${lambdaS} m and ${lambdaI} m, need one wavelength`,
    );
  }
  return prefactor(omegaOf(lambdaS), strength);
}

/**
 * Prefactor of the sum frequency of two distinct fields, P_p = prefactor·L²|φ|²·P_s·P_i, in 1/(W·m²):
 * 2ω_p²d²/(ε₀c³n_s n_i n_p A_eff). @throws RangeError for a value that is not positive, or no energy balance
 */
export function sumFrequencyPrefactor(strength: Strength): number {
  return prefactor(omegaOf(strength.waves.lambdaP), strength);
}

/**
 * Prefactor of the difference frequency, P_i = prefactor·L²|φ|²·P_p·P_s, in 1/(W·m²):
 * 2ω_i²d²/(ε₀c³n_s n_i n_p A_eff). @throws RangeError for a value that is not positive, or no energy balance
 */
export function differenceFrequencyPrefactor(strength: Strength): number {
  return prefactor(omegaOf(strength.waves.lambdaI), strength);
}

/**
 * Coupling g of the photon-flux amplitudes a = √(P/ω), in √(1/(W·s))·(1/m): da_p/dz = i·g·d(z)·a_s·a_i, and alike for
 * the other two. g² = 2ω_pω_sω_i d²/(ε₀c³n_s n_i n_p A_eff): the same for sum and difference frequency.
 * @throws RangeError for a value that is not positive, or no energy balance
 */
export function photonCoupling(strength: Strength): number {
  const { lambdaP, lambdaS, lambdaI } = strength.waves;
  const omegaP = omegaOf(lambdaP);
  // sum-frequency prefactor × ω_sω_i/ω_p
  return Math.sqrt(prefactor(omegaP, strength) * omegaOf(lambdaS) * omegaOf(lambdaI) / omegaP);
}

function prefactor(omega: number, { waves, n, d, effectiveArea }: Strength): number {
  requirePositive({ ...n, d: Math.abs(d), effectiveArea });
  requireEnergyBalance(waves);
  const numerator = 2 * omega ** 2 * d ** 2;
  return numerator / (VACUUM_PERMITTIVITY * SPEED_OF_LIGHT ** 3 * n.p * n.s * n.i * effectiveArea);
}

function requireEnergyBalance({ lambdaP, lambdaS, lambdaI }: ThreeWaves): void {
  requirePositive({ lambdaP, lambdaS, lambdaI });
  const miss = lambdaP / lambdaS + lambdaP / lambdaI - 1;
  if (!(Math.abs(miss) <= 1e-6)) {
    throw new RangeError(
      `Cannot couple ${lambdaS} m and ${lambdaI} m to ${lambdaP} m: found ω_s + ω_i off ω_p by ${miss}, need 1e-6`,
    );
  }
}

function requirePositive(values: Readonly<Record<string, number>>): void {
  for (const [name, value] of Object.entries(values)) {
    if (!(value > 0 && value < Infinity)) {
      throw new RangeError(
        `Cannot compute a conversion prefactor: found ${name} = ${value}, need a finite number > 0`,
      );
    }
  }
}
