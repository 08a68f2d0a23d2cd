// Pure: no I/O, no clock, no hidden randomness.
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";

/**
 * Quantile of a standard normal that keeps its digits in the lower tail: the library's has few left at 1e−12, and is −∞ below
 * 1e−16.
 * @param p probability, down to 1e−300
 */
export function lowerQuantile(p: number): number {
  if (p > 1e-6) return normalQuantile(p, 0, 1);
  const log = Math.log(p);
  let z = -Math.sqrt(-2 * log - Math.log(-4 * Math.PI * log));
  // Newton's method on ln Φ, which is nearly a parabola out there.
  for (let i = 0; i < 20; i++) {
    const tail = normalCdf(z, 0, 1);
    const step = (Math.log(tail) - log) * tail / (Math.exp(-0.5 * z * z) / Math.sqrt(2 * Math.PI));
    z -= step;
    if (Math.abs(step) < 1e-13 * -z) break;
  }
  return z;
}
