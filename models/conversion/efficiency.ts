// Pure: no I/O, no clock, no hidden randomness.

/** Efficiency of a device and the same per poled length squared; both with loss, inside the guide. */
export interface DeviceEfficiency {
  /** P_out/(P·P), 1/W. */
  readonly perW: number;
  /** `perW` divided by the poled length squared, 1/(W·m²); losses stay included. */
  readonly perWm2: number;
}

/**
 * η = prefactor·L²·|φ|² at low depletion: P₂/P₁² of a second harmonic (P₁ all the fundamental), P_out/(P_a·P_b) of a
 * sum or difference frequency.
 * @param prefactor 1/(W·m²)
 * @param poledLength L of the 1/L in φ, m
 * @param phiSquared |φ|² with the loss weight g(z) in it (its amplitude, too)
 * @throws RangeError for a value that is negative or not finite
 */
export function deviceEfficiency(
  prefactor: number,
  poledLength: number,
  phiSquared: number,
): DeviceEfficiency {
  for (const [name, x] of Object.entries({ prefactor, poledLength, phiSquared })) {
    if (!(x >= 0 && x < Infinity)) {
      throw new RangeError(`Cannot compute an efficiency: found ${name} = ${x}, need a finite number >= 0`);
    }
  }
  const perWm2 = prefactor * phiSquared;
  return { perW: perWm2 * poledLength ** 2, perWm2 };
}
