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
/** Between two points of that grid |S|² may rise by (π/2/8)² = 4 %: every peak this near to the highest is refined. */
const NEAR_BEST = 0.95;
const GOLDEN = (Math.sqrt(5) - 1) / 2;

/** Transform and work arrays of one size. */
interface Plan {
  readonly fft: FFT;
  readonly input: Float64Array;
  readonly output: Float64Array;
  readonly squares: Float64Array;
}

// Kept between calls: the arrays are overwritten before they are read, so results do not depend on them.
const plans = new Map<number, Plan>();

function planFor(size: number): Plan {
  let plan = plans.get(size);
  if (plan === undefined) {
    const numbers = () => new Float64Array(2 * size);
    plan = { fft: new FFT(size), input: numbers(), output: numbers(), squares: new Float64Array(size) };
    if (plans.size >= 8) plans.clear();
    plans.set(size, plan);
  }
  return plan;
}

/**
 * Maximum over τ of |S(τ)|, S(τ) = Σ_k D_k·e^{iτk·step} (the frequency of D_0 does not matter): one FFT to find the
 * highest points, golden section around them. τ is searched over one period, −π/step … π/step.
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
  const { fft, input, output, squares } = planFor(size);
  input.fill(0, 2 * re.length);
  for (let k = 0; k < re.length; k++) {
    input[2 * k] = re[k]!;
    input[2 * k + 1] = im[k]!;
  }
  fft.transform(output, input);
  let highest = 0;
  for (let q = 0; q < size; q++) {
    squares[q] = output[2 * q]! ** 2 + output[2 * q + 1]! ** 2;
    highest = Math.max(highest, squares[q]!);
  }
  if (highest === 0) return { value: 0, delay: 0 };
  // the transform has e^{−2πikq/size}: the delay is the negative of its angle
  const cell = 2 * Math.PI / (size * step);
  let best: DelayMaximum = { value: -1, delay: 0 };
  for (let q = 0; q < size; q++) {
    const square = squares[q]!;
    if (square < NEAR_BEST * highest) continue;
    if (square < squares[(q + 1) % size]! || square < squares[(q + size - 1) % size]!) continue;
    const found = refineMaximum(re, im, step, -(q > size / 2 ? q - size : q) * cell, cell);
    if (found.value > best.value) best = found;
  }
  return best;
}

/** Golden section for |S| within `cell` to both sides of `near`. */
function refineMaximum(
  re: Float64Array,
  im: Float64Array,
  step: number,
  near: number,
  cell: number,
): DelayMaximum {
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
