// Pure: no I/O, no clock, no hidden randomness.
import { SPEED_OF_LIGHT, VACUUM_PERMITTIVITY } from "../../shared/constants.ts";

/** What fixes how strongly a guide makes pairs. */
export interface PairStrength {
  /** Angular frequencies of signal and idler, rad/s. */
  readonly omegaS: number;
  readonly omegaI: number;
  /** Effective indices. */
  readonly nP: number;
  readonly nS: number;
  readonly nI: number;
  /** The crystal's coefficient at these wavelengths, m/V; the 2/π is in φ. */
  readonly d: number;
  /** Overlap area of the three modes, m². */
  readonly effectiveArea: number;
}

/**
 * Γ² = 2ω_sω_i d²/(ε₀c³ n_pn_sn_i A_eff), 1/(W·m²): gain per pump power and length². A weak parametric amplifier makes
 * P·Γ²L²|φ|² pairs per mode, and modes come at dω/2π per second (D. A. Kleinman, Phys. Rev. 174, 1027 (1968)).
 * @throws RangeError for a value that is not positive and finite (d may have either sign)
 */
export function parametricStrength(at: PairStrength): number {
  for (const [name, value] of Object.entries({ ...at, d: Math.abs(at.d) })) {
    if (!(value > 0 && value < Infinity)) {
      throw new RangeError(
        `Cannot compute a pair strength: found ${name} = ${value}, need a finite number > 0`,
      );
    }
  }
  const { omegaS, omegaI, nP, nS, nI, d, effectiveArea } = at;
  return 2 * omegaS * omegaI * d ** 2 /
    (VACUUM_PERMITTIVITY * SPEED_OF_LIGHT ** 3 * nP * nS * nI * effectiveArea);
}

/** Mean pairs per pulse above which the low-gain picture fails. */
export const LOW_GAIN_LIMIT = 0.1;

/** The remark on a pulse that makes too many pairs, or null. */
export function lowGainRemark(pairsPerPulse: number): string | null {
  if (pairsPerPulse <= LOW_GAIN_LIMIT) return null;
  return `beyond_low_gain: ${
    pairsPerPulse.toPrecision(3)
  } pairs per pulse, the low-gain picture holds to ${LOW_GAIN_LIMIT}`;
}
