// Pure: no I/O, no clock, no hidden randomness.
import FFT from "fft.js";

/** The largest modulus of a sum over delays, and the delay where it is. */
export interface DelayMaximum {
  /** |S| at the delay. */
  readonly value: number;
  /** s */
  readonly delay: number;
}

/** Delays are first searched on a grid this much finer than the sum can vary. */
const OVERSAMPLING = 8;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/**
 * Maximum over τ of |S(τ)|, S(τ) = Σ_k D_k·e^{iτk·step}, as for any first frequency of D_0: one FFT to find the highest point, golden section
 * around it. τ is searched over one period, −π/step … π/step.
 * @param re D, and `im`
 * @param step of the angular frequency from one D to the next, rad/s
 */
export function maximiseOverDelay(
  re: Float64Array,
  im: Float64Array,
  step: number,
): DelayMaximum {
  let size = 2;
  while (size < OVERSAMPLING * re.length) size *= 2;
  const fft = new FFT(size);
  const input = fft.createComplexArray() as number[];
  const output = fft.createComplexArray() as number[];
  for (let k = 0; k < re.length; k++) {
    input[2 * k] = re[k]!;
    input[2 * k + 1] = im[k]!;
  }
  fft.transform(output, input);
  let best = 0;
  let highest = -1;
  for (let q = 0; q < size; q++) {
    const square = output[2 * q]! ** 2 + output[2 * q + 1]! ** 2;
    if (square > highest) {
      highest = square;
      best = q;
    }
  }
  // the transform has e^{−2πikq/size}: the delay is the negative of its angle
  const cell = 2 * Math.PI / (size * step);
  const near = -(best > size / 2 ? best - size : best) * cell;
  const modulus = (tau: number) => modulusAt(re, im, tau * step);
  let lo = near - cell;
  let hi = near + cell;
  let a = hi - GOLDEN * (hi - lo);
  let b = lo + GOLDEN * (hi - lo);
  let fa = modulus(a);
  let fb = modulus(b);
  for (let k = 0; k < 32; k++) {
    if (fa < fb) {
      [lo, a, fa] = [a, b, fb];
      b = lo + GOLDEN * (hi - lo);
      fb = modulus(b);
    } else {
      [hi, b, fb] = [b, a, fa];
      a = hi - GOLDEN * (hi - lo);
      fa = modulus(a);
    }
  }
  const delay = (lo + hi) / 2;
  return { value: modulus(delay), delay };
}

/** |Σ D_k e^{ikθ}|. */
function modulusAt(re: Float64Array, im: Float64Array, theta: number): number {
  const c = Math.cos(theta);
  const s = Math.sin(theta);
  let sumRe = 0;
  let sumIm = 0;
  // Horner's scheme from the last element down
  for (let k = re.length - 1; k >= 0; k--) {
    const t = sumRe * c - sumIm * s + re[k]!;
    sumIm = sumRe * s + sumIm * c + im[k]!;
    sumRe = t;
  }
  return Math.hypot(sumRe, sumIm);
}
