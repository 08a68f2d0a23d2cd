// Pure: no I/O, no clock, no hidden randomness.
import chiSquareCdf from "@stdlib/stats-base-dists-chisquare-cdf";
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";

/** P(χ² ≥ x) on `dof` degrees of freedom. */
export const chiSquareTail = (x: number, dof: number): number => 1 - chiSquareCdf(x, dof);

/** P(|z| ≥ |x|) of a standard normal; the lower tail twice keeps small values. */
export const normalTails = (x: number): number => 2 * normalCdf(-Math.abs(x), 0, 1);

/**
 * P(|t| ≥ |x|) of Student's t on a whole number of degrees of freedom: the finite trigonometric sums of
 * M. Abramowitz & I. A. Stegun (eds), Handbook of Mathematical Functions, 26.7.3–4 (from memory).
 */
export function studentTails(x: number, dof: number): number {
  const angle = Math.atan(Math.abs(x) / Math.sqrt(dof));
  const cosine = Math.cos(angle);
  const odd = dof % 2 === 1;
  // Σ c_k cos^{2k(+1)}, each term from the one before
  let term = odd ? cosine : 1;
  let sum = dof > 1 ? term : 0;
  for (let k = odd ? 3 : 2; k <= dof - 2; k += 2) {
    term *= (k - 1) / k * cosine ** 2;
    sum += term;
  }
  const inside = odd ? 2 / Math.PI * (angle + Math.sin(angle) * sum) : Math.sin(angle) * sum;
  return Math.max(0, 1 - inside);
}
