// Pure: no I/O, no clock, no hidden randomness.

/** Steps in the lag and nodes along the guide: the curve then holds to 1e-4 of its peak. */
const LAGS = 240;
const PLACES = 40;

/**
 * Mean of |φ|² (relative to the ideal peak) over guides whose δβ(z) is stationary, normal, of covariance σ²e^{−|Δz|/ℓ}, each
 * with the mean of its own δβ taken off. For normal phases ⟨e^{i(θ−θ′)}⟩ = e^{−½Var(θ−θ′)}, so
 *
 *   ⟨|φ|²⟩(Δβ) = (2/L²) ∫₀^L cos(Δβu) ∫₀^{L−u} e^{−½σ²v(z, z+u)} dz du,
 *   v(z, z+u) = D(u) − (u/L)·[D(z+u) − D(z) + D(L−z) − D(L−z−u)] + (u/L)²·D(L),  D(u) = 2ℓ²(u/ℓ − 1 + e^{−u/ℓ}).
 *
 * The width of this mean is not the mean width: one guide with ℓ ≪ L has a narrow peak among many side peaks, and only the
 * mean over guides is broad. It serves to check realisations.
 * @param correlation ℓ/L
 * @returns by σL, the curve over ΔβL
 * @throws RangeError unless ℓ/L is positive
 */
export function meanTuningCurve(correlation: number): (sigma: number) => (phase: number) => number {
  if (!(correlation > 0 && correlation < Infinity)) {
    throw new RangeError(
      `Cannot average tuning curves: found a correlation of ${correlation} lengths, need > 0`,
    );
  }
  const c = correlation;
  const D = (u: number) => 2 * c * c * excess(u / c);
  const v = new Float64Array((LAGS + 1) * PLACES);
  for (let j = 0; j <= LAGS; j++) {
    const u = j / LAGS;
    for (let k = 0; k < PLACES; k++) {
      const z = (k + 0.5) / PLACES * (1 - u);
      const bridge = D(z + u) - D(z) + D(1 - z) - D(Math.max(0, 1 - z - u));
      v[j * PLACES + k] = Math.max(0, D(u) - u * bridge + u * u * D(1));
    }
  }
  return (sigma) => {
    const h = new Float64Array(LAGS + 1);
    for (let j = 0; j <= LAGS; j++) {
      let sum = 0;
      for (let k = 0; k < PLACES; k++) sum += Math.exp(-sigma * sigma * v[j * PLACES + k]! / 2);
      const simpson = j === 0 || j === LAGS ? 1 : j % 2 === 1 ? 4 : 2;
      h[j] = simpson / (3 * LAGS) * (1 - j / LAGS) * sum / PLACES;
    }
    return (phase) => {
      let sum = 0;
      for (let j = 0; j <= LAGS; j++) sum += h[j]! * Math.cos(phase * j / LAGS);
      return 2 * sum;
    };
  };
}

/** x − 1 + e^{−x} for x ≥ 0 without cancellation. */
function excess(x: number): number {
  return x < 0.02 ? x * x / 2 * (1 - x / 3 * (1 - x / 4 * (1 - x / 5))) : x + Math.expm1(-x);
}
