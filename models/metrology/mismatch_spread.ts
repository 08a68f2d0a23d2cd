// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";
import { HALF_MAXIMUM } from "./_sinc.ts";
import type { Refused } from "./refusal.ts";

/** A spread of the mismatch along a guide that would explain how broad its tuning curve is. */
export interface MismatchSpread {
  /** Standard deviation of δβ(z) before its mean over the guide is taken off, 1/m. */
  readonly sd: Uncertain;
  /** Measured width over that of the poled length. */
  readonly broadening: Uncertain;
  /** Mean share of the ideal peak efficiency that such guides keep. */
  readonly peakKept: number;
}

/** Steps in the lag and nodes along the guide: the width then holds to 1e-4 up to `WIDEST`. */
const LAGS = 240;
const PLACES = 40;
/** Broadening beyond which a curve is several peaks rather than one broadened one. */
const WIDEST = 6;

/**
 * Standard deviation of δβ at a stated correlation length ℓ that would explain a tuning curve broader than its poled
 * length L allows.
 *
 * δβ(z) is taken as a stationary normal process with covariance σ²e^{−|Δz|/ℓ}; its mean over the guide shifts the
 * centre, which the scan's fit has taken off, so only θ(z) − θ(L)z/L acts. For normal phases ⟨e^{i(θ−θ′)}⟩ =
 * e^{−½Var(θ−θ′)}, and the mean tuning curve is
 *
 *   ⟨|φ|²⟩(Δβ) = (2/L²) ∫₀^L cos(Δβu) ∫₀^{L−u} e^{−½σ²v(z, z+u)} dz du,
 *   v(z, z+u) = D(u) − (u/L)·[D(z+u) − D(z) + D(L−z) − D(L−z−u)] + (u/L)²·D(L),  D(u) = 2ℓ²(u/ℓ − 1 + e^{−u/ℓ}).
 *
 * σ is where the half-width of that mean curve meets the measured one: guides of one σ scatter about it, so for a
 * single scan this is an estimate whose u holds the reading error only. A shorter poled length broadens alike: check
 * it first. The peak's height is on a free scale and cannot be used.
 * Refused where the curve is not broader than the poled length's own within 2 u, so that only an upper limit could be
 * told, or broader than one peak can be.
 * @param fwhm measured width in Δβ, 1/m
 * @param poledLength L, m
 * @param correlationLength ℓ, m
 * @throws RangeError for a value that is not positive
 */
export function mismatchSpread(
  fwhm: Uncertain,
  poledLength: number,
  correlationLength: number,
): MismatchSpread | Refused {
  for (const [name, x] of Object.entries({ fwhm: fwhm.value, poledLength, correlationLength })) {
    if (!(x > 0 && x < Infinity)) {
      throw new RangeError(`Cannot explain a width: found ${name} = ${x}, need a finite number > 0`);
    }
  }
  if (!(fwhm.u >= 0)) throw new RangeError(`Cannot explain a width: found u ${fwhm.u}, need u >= 0`);
  const own = 4 * HALF_MAXIMUM / poledLength;
  const broadening = { value: fwhm.value / own, u: fwhm.u / own };
  const text = `${broadening.value.toFixed(4)} times the width of the poled length`;
  if (!(broadening.value - 1 > Math.max(2 * broadening.u, 1e-3))) {
    return {
      refused: `tuning curve ${text}, u ${broadening.u.toFixed(4)}: not broader, so no spread can be told`,
    };
  }
  if (!(broadening.value <= WIDEST)) return { refused: `tuning curve ${text}: more than one peak` };
  const curve = meanCurve(correlationLength / poledLength);
  const sigma = inverseWidth(curve, broadening.value);
  if (sigma === null) {
    return {
      refused: `tuning curve ${text}: no spread with a correlation of ${correlationLength} m broadens so`,
    };
  }
  // Where one u more or less leaves the range that can be inverted, the other side alone tells the slope.
  const up = inverseWidth(curve, Math.min(WIDEST, broadening.value + broadening.u)) ?? sigma;
  const down = inverseWidth(curve, broadening.value - broadening.u) ?? sigma;
  return {
    sd: { value: sigma / poledLength, u: (up - down) / 2 / poledLength },
    broadening,
    peakKept: curve(sigma)(0),
  };
}

/** ⟨|φ|²⟩ as a function of ΔβL for a given σL, L = 1; `c` = ℓ/L. */
function meanCurve(c: number): (sigma: number) => (phase: number) => number {
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

/** Half-width at half maximum over that of the ideal curve. */
function widthOf(curve: (phase: number) => number): number {
  const half = curve(0) / 2;
  const step = HALF_MAXIMUM / 4;
  let high = step;
  while (curve(high) > half && high < 2 * HALF_MAXIMUM * 4 * WIDEST) high += step;
  let low = high - step;
  for (let pass = 0; pass < 24; pass++) {
    const mid = (low + high) / 2;
    if (curve(mid) > half) low = mid;
    else high = mid;
  }
  return (low + high) / 2 / (2 * HALF_MAXIMUM);
}

function inverseWidth(
  curve: (sigma: number) => (phase: number) => number,
  broadening: number,
): number | null {
  if (broadening <= 1) return 0;
  let high = 1;
  while (widthOf(curve(high)) < broadening) {
    high *= 1.5;
    if (high > 3000) return null;
  }
  let low = high === 1 ? 0 : high / 1.5;
  for (let pass = 0; pass < 24; pass++) {
    const mid = (low + high) / 2;
    if (widthOf(curve(mid)) < broadening) low = mid;
    else high = mid;
  }
  return (low + high) / 2;
}
