// Pure: no I/O, no clock, no hidden randomness.
// Answers in closed form for uniform gratings, ends of the range that the integrations have to meet.

/** |φ| of an ideal first-order grating of duty ½ at its peak, without loss. */
export const FIRST_ORDER = 2 / Math.PI;

/**
 * |(1/L)∫₀^L e^{iδz − γz} dz|² = e^{−γL}·[sinh²(γL/2) + sin²(δL/2)]/[(γL/2)² + (δL/2)²]: what loss and mismatch leave
 * of a uniform grating's efficiency. Multiply by (2/π)² for the first order and by the amplitude² of the loss weight.
 * @param detuning δ = |Δβ| − 2π/Λ, 1/m
 * @param decay γ of the loss weight, 1/m; may be negative
 * @param length L, m
 */
export function lossyUniform(detuning: number, decay: number, length: number): number {
  const x = decay * length / 2;
  const y = detuning * length / 2;
  // Where both arguments are tiny the quotient is 1 − 2x/… to rounding, and 0/0 at the very origin.
  if (x * x + y * y < 1e-200) return 1;
  // e^{−γL}·sinh²(γL/2) = ((1 − e^{−γL})/2)²: no overflow for a long lossy guide, no cancellation for a short one.
  const growth = Math.expm1(-2 * x) / 2;
  return (growth ** 2 + Math.exp(-2 * x) * Math.sin(y) ** 2) / (x * x + y * y);
}

/**
 * Depleted second harmonic without loss at phase matching: P₂/P₁ = tanh²√(ηP₁), ηP₁ the low-depletion answer
 * (J. A. Armstrong et al., Phys. Rev. 127, 1918 (1962)). Type II with the power split equally is the same.
 */
export function depletedSecondHarmonic(lowDepletion: number): number {
  return Math.tanh(Math.sqrt(lowDepletion)) ** 2;
}

/**
 * Sum frequency with an undepleted strong wave, no loss: fraction of the weak wave's photons that are converted,
 * [Γ²/(Γ²+δ²/4)]·sin²(L√(Γ²+δ²/4)).
 * @param perW η of the device at phase matching, P_p/(P_sP_i), 1/W
 * @param strongPower W
 * @param omegaRatio ω_weak/ω_p: turns power into photons
 * @param halfPhase δL/2, the mismatch left beside the grating; 0 at phase matching
 */
export function undepletedSumFrequency(
  perW: number,
  strongPower: number,
  omegaRatio: number,
  halfPhase = 0,
): number {
  const gammaL2 = perW * strongPower * omegaRatio;
  const argument2 = gammaL2 + halfPhase ** 2;
  return argument2 === 0 ? 0 : gammaL2 / argument2 * Math.sin(Math.sqrt(argument2)) ** 2;
}

/**
 * Difference frequency with an undepleted pump, no loss: idler photons per signal photon at the input,
 * [Γ²/(Γ²−δ²/4)]·sinh²(L√(Γ²−δ²/4)), which turns into sin² below the parametric threshold of the mismatch.
 * @param perW η of the device at phase matching, P_i/(P_pP_s), 1/W
 * @param pumpPower W
 * @param omegaRatio ω_s/ω_i: turns power into photons
 * @param halfPhase δL/2; 0 at phase matching
 */
export function undepletedDifferenceFrequency(
  perW: number,
  pumpPower: number,
  omegaRatio: number,
  halfPhase = 0,
): number {
  const gammaL2 = perW * pumpPower * omegaRatio;
  const argument2 = gammaL2 - halfPhase ** 2;
  const root = Math.sqrt(Math.abs(argument2));
  if (root < 1e-8) return gammaL2; // both branches tend to Γ²L²
  const s = argument2 > 0 ? Math.sinh(root) : Math.sin(root);
  return gammaL2 * (s / root) ** 2;
}
