// Pure: no I/O, no clock, no hidden randomness.
import { HALF_MAXIMUM, sincSquared } from "./_sinc.ts";

/** What a sinc² fit says of a simulated curve. */
export interface PeakShape {
  /** Full width at half maximum of the fitted sinc², in the unit of x. */
  readonly width: number;
  /** Mean product of neighbouring residuals over the square of the height: what no sinc² explains, free of noise. */
  readonly structure: number;
}

const ROUNDS = 15;

/**
 * The fit of `fitTuningScan`, offset + scale·sinc², for the many simulated curves of a spread: equal weights, no u, and a
 * peak near 0 whose width is roughly known. Null where it runs away.
 * @param x ascending
 */
export function peakShape(x: Float64Array, y: Float64Array, startWidth: number): PeakShape | null {
  const n = x.length;
  let [centre, width, scale, offset] = [0, startWidth, Math.max(...y), 0];
  let damping = 1e-3;
  let squares = sumOfSquares(x, y, centre, width, scale, offset);
  const a = new Float64Array(16);
  const b = new Float64Array(4);
  const g = new Float64Array(4);
  for (let round = 0; round < ROUNDS; round++) {
    a.fill(0);
    b.fill(0);
    for (let k = 0; k < n; k++) {
      const v = 2 * HALF_MAXIMUM * (x[k]! - centre) / width;
      const [value, slope] = sincSquared(v);
      g[0] = -scale * slope * 2 * HALF_MAXIMUM / width;
      g[1] = -scale * slope * v / width;
      g[2] = value;
      g[3] = 1;
      const r = y[k]! - offset - scale * value;
      for (let i = 0; i < 4; i++) {
        b[i]! += g[i]! * r;
        for (let j = 0; j <= i; j++) a[4 * i + j]! += g[i]! * g[j]!;
      }
    }
    let moved = Infinity;
    // Levenberg's damping until the step helps.
    for (;;) {
      const step = solved(a, b, damping);
      if (step === null) return null;
      const next = [centre + step[0]!, width + step[1]!, scale + step[2]!, offset + step[3]!] as const;
      const there = next[1] > 0 ? sumOfSquares(x, y, ...next) : Infinity;
      if (there <= squares) {
        moved = Math.abs(step[1]!) / width;
        [centre, width, scale, offset] = next;
        squares = there;
        damping = Math.max(1e-9, damping / 10);
        break;
      }
      damping *= 10;
      if (damping > 1e6) {
        moved = 0;
        break;
      }
    }
    if (moved < 1e-3) break; // the next step would be a thousandth of this one
  }
  const reach = x[n - 1]! - x[0]!;
  if (!(width > 0 && width < reach && scale > 0)) return null;
  let structure = 0;
  let before = 0;
  for (let k = 0; k < n; k++) {
    const r = y[k]! - offset - scale * sincSquared(2 * HALF_MAXIMUM * (x[k]! - centre) / width)[0];
    if (k > 0) structure += r * before;
    before = r;
  }
  return { width, structure: structure / n / (scale * scale) };
}

function sumOfSquares(
  x: Float64Array,
  y: Float64Array,
  centre: number,
  width: number,
  scale: number,
  offset: number,
): number {
  let sum = 0;
  for (let k = 0; k < x.length; k++) {
    sum += (y[k]! - offset - scale * sincSquared(2 * HALF_MAXIMUM * (x[k]! - centre) / width)[0]) ** 2;
  }
  return sum;
}

/** (A + damping·diag A)⁻¹b of a symmetric 4 × 4 matrix given by its lower half; null where it is singular. */
function solved(a: Float64Array, b: Float64Array, damping: number): Float64Array | null {
  const l = new Float64Array(16);
  for (let i = 0; i < 4; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = a[4 * i + j]! * (i === j ? 1 + damping : 1);
      for (let k = 0; k < j; k++) sum -= l[4 * i + k]! * l[4 * j + k]!;
      if (i === j && !(sum > 0)) return null;
      l[4 * i + j] = i === j ? Math.sqrt(sum) : sum / l[4 * j + j]!;
    }
  }
  const s = Float64Array.from(b);
  for (let i = 0; i < 4; i++) {
    for (let k = 0; k < i; k++) s[i]! -= l[4 * i + k]! * s[k]!;
    s[i]! /= l[4 * i + i]!;
  }
  for (let i = 3; i >= 0; i--) {
    for (let k = i + 1; k < 4; k++) s[i]! -= l[4 * k + i]! * s[k]!;
    s[i]! /= l[4 * i + i]!;
  }
  return s;
}
