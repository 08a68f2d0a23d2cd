// Pure: no I/O, no clock, no hidden randomness.
// Non-uniform Fourier sums of type 1 by spreading onto a twice finer grid and one FFT: A. Dutt & V. Rokhlin, SIAM J.
// Sci. Comput. 14, 1368 (1993); Kaiser–Bessel kernel and its width after P. J. Beatty, D. G. Nishimura & J. M. Pauly,
// IEEE Trans. Med. Imaging 24, 799 (2005).
import FFT from "fft.js";

/** Grid points that one source touches, and degree of the polynomials that stand for the kernel on each of them. */
const WIDTH = 10;
const DEGREE = 12;
const TERMS = DEGREE + 1;
/** Largest error of a sum over Σ|c_j|, with some reserve over what the tests see. */
export const TYPE1_ERROR = 1e-9;
/** Beatty's shape parameter for a grid of twice the band. A finer grid only moves the aliases further away. */
const BETA = Math.PI * Math.sqrt((WIDTH * 0.75) ** 2 - 0.8);

/** Modified Bessel function I₀ by its power series: all terms positive, so no digits cancel. */
function besselI0(x: number): number {
  const quarter = x * x / 4;
  let term = 1;
  let sum = 1;
  for (let k = 1; term > 1e-17 * sum; k++) {
    term *= quarter / (k * k);
    sum += term;
  }
  return sum;
}

/**
 * Row i holds the monomial coefficients, in τ = 2f − 1, of the kernel at distance i + 1 − WIDTH/2 − f from a source
 * that sits the fraction f inside its cell. The kernel is entire in its argument, so the polynomials converge fast.
 */
const KERNEL = kernelPolynomials();

function kernelPolynomials(): Float64Array {
  const table = new Float64Array(WIDTH * TERMS);
  const chebyshev = chebyshevMonomials();
  const values = new Float64Array(TERMS);
  const top = besselI0(BETA);
  for (let i = 0; i < WIDTH; i++) {
    for (let q = 0; q < TERMS; q++) {
      const f = (Math.cos(Math.PI * (q + 0.5) / TERMS) + 1) / 2;
      const y = (i + 1 - WIDTH / 2 - f) * 2 / WIDTH;
      values[q] = besselI0(BETA * Math.sqrt(Math.max(0, 1 - y * y))) / top;
    }
    for (let n = 0; n < TERMS; n++) {
      let c = 0;
      for (let q = 0; q < TERMS; q++) c += values[q]! * Math.cos(Math.PI * n * (q + 0.5) / TERMS);
      c *= (n === 0 ? 1 : 2) / TERMS;
      for (let p = 0; p < TERMS; p++) table[i * TERMS + p]! += c * chebyshev[n * TERMS + p]!;
    }
  }
  return table;
}

/** Row n: monomial coefficients of the Chebyshev polynomial T_n. */
function chebyshevMonomials(): Float64Array {
  const t = new Float64Array(TERMS * TERMS);
  t[0] = 1;
  t[TERMS + 1] = 1;
  for (let n = 2; n < TERMS; n++) {
    for (let p = 0; p < TERMS; p++) {
      t[n * TERMS + p] = (p > 0 ? 2 * t[(n - 1) * TERMS + p - 1]! : 0) - t[(n - 2) * TERMS + p]!;
    }
  }
  return t;
}

/** Everything that depends on the number of frequencies only, with the work arrays. */
interface Plan {
  readonly size: number;
  readonly fft: FFT;
  readonly grid: Float64Array;
  readonly transformed: Float64Array;
  /** 1 / transform of the kernel at m = −⌊count/2⌋ … */
  readonly correction: Float64Array;
}

// Work arrays are kept between calls: they are overwritten before they are read, so results do not depend on them.
const plans = new Map<number, Plan>();
const momentsRe = new Float64Array(TERMS);
const momentsIm = new Float64Array(TERMS);

function planFor(count: number): Plan {
  const known = plans.get(count);
  if (known !== undefined) return known;
  let size = 32;
  while (size < 2 * count) size *= 2;
  const correction = new Float64Array(count);
  const top = besselI0(BETA);
  for (let k = 0; k < count; k++) {
    const w = Math.PI * WIDTH * (k - (count >> 1)) / size;
    // |w| <= πWIDTH/4 < BETA, so the root is real.
    const root = Math.sqrt(BETA * BETA - w * w);
    correction[k] = top * root / (WIDTH * Math.sinh(root));
  }
  const plan: Plan = {
    size,
    fft: new FFT(size),
    grid: new Float64Array(2 * size),
    transformed: new Float64Array(2 * size),
    correction,
  };
  if (plans.size >= 8) plans.clear();
  plans.set(count, plan);
  return plan;
}

/**
 * outRe + i·outIm at index k = Σ_j (cRe_j + i·cIm_j)·exp(i·m·x_j), m = k − ⌊count/2⌋, for the first `sources` entries;
 * error below `TYPE1_ERROR`·Σ|c_j|. Fastest when x is ascending: sources of one grid cell are gathered into moments, and
 * the kernel is applied once per cell. `out…` have the length of the band and may not be the inputs.
 */
export function type1Into(
  x: Float64Array,
  cRe: Float64Array,
  cIm: Float64Array,
  sources: number,
  outRe: Float64Array,
  outIm: Float64Array,
): void {
  const count = outRe.length;
  const { size, fft, grid, transformed, correction } = planFor(count);
  grid.fill(0);
  momentsRe.fill(0);
  momentsIm.fill(0);
  const perRadian = size / (2 * Math.PI);
  let cell = -1;
  for (let j = 0; j < sources; j++) {
    let u = x[j]! * perRadian;
    u -= size * Math.floor(u / size);
    if (u >= size) u = 0; // −tiny wraps to `size` itself by rounding
    const at = u | 0;
    if (at !== cell) {
      if (cell >= 0) spreadCell(grid, size, cell);
      cell = at;
    }
    const t = 2 * (u - at) - 1;
    let re = cRe[j]!;
    let im = cIm[j]!;
    for (let p = 0; p < TERMS; p++) {
      momentsRe[p]! += re;
      momentsIm[p]! += im;
      re *= t;
      im *= t;
    }
  }
  if (cell >= 0) spreadCell(grid, size, cell);
  // The library's forward transform has e^(−2πi…): index −m gives the sum with the positive sign.
  fft.transform(transformed, grid);
  const half = count >> 1;
  for (let k = 0; k < count; k++) {
    const at = (half - k) & (size - 1);
    outRe[k] = transformed[2 * at]! * correction[k]!;
    outIm[k] = transformed[2 * at + 1]! * correction[k]!;
  }
}

/** Adds the gathered moments of one cell to the grid and clears them. */
function spreadCell(grid: Float64Array, size: number, cell: number): void {
  for (let i = 0; i < WIDTH; i++) {
    let re = 0;
    let im = 0;
    for (let p = 0, a = i * TERMS; p < TERMS; p++, a++) {
      re += KERNEL[a]! * momentsRe[p]!;
      im += KERNEL[a]! * momentsIm[p]!;
    }
    const at = (cell + i + 1 - WIDTH / 2) & (size - 1);
    grid[2 * at]! += re;
    grid[2 * at + 1]! += im;
  }
  momentsRe.fill(0);
  momentsIm.fill(0);
}
