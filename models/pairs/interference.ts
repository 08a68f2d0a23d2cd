// Pure: no I/O, no clock, no hidden randomness.
import { type DelayMaximum, maximiseOverDelay } from "./delay.ts";
import type { ComplexMatrix } from "./gram.ts";

/**
 * Overlap of a pair with its exchanged self, max over τ of |∬C(ω_s,ω_i)C*(ω_i,ω_s)e^{iτ(ω_s−ω_i)}|/∬|C|²: the depth of
 * the two-photon dip of signal against idler behind a 50:50 splitter, with the delay set to its best value.
 * @param c square matrix, both axes on one uniform grid
 * @param step of the grid, rad/s
 * @param powerS,powerI filter transmissions on the grid: C = t_s·c·t_i; default 1
 * @param norm ∬|C|² if C also lives where only one arm reaches, so that the grid does not hold all of it
 * @returns overlap 0…1 and the delay τ in s; 0 at τ = 0 if nothing passes
 * @throws RangeError if the matrix is not square
 */
export function exchangeOverlap(
  c: ComplexMatrix,
  step: number,
  powerS?: Float64Array,
  powerI?: Float64Array,
  norm?: number,
): DelayMaximum {
  const n = c.rows;
  if (c.cols !== n) {
    throw new RangeError(`Cannot exchange the arms of ${n} × ${c.cols} points: need a square`);
  }
  const re = new Float64Array(2 * n - 1);
  const im = new Float64Array(2 * n - 1);
  let here = 0;
  for (let j = 0; j < n; j++) {
    const sj = powerS?.[j] ?? 1;
    const ij = powerI?.[j] ?? 1;
    here += sj * ij * (c.re[j * n + j]! ** 2 + c.im[j * n + j]! ** 2);
    re[n - 1]! += sj * ij * (c.re[j * n + j]! ** 2 + c.im[j * n + j]! ** 2);
    // The other half of the square is the mirror image: (l, j) adds the conjugate at −(j − l).
    for (let l = 0; l < j; l++) {
      const sl = powerS?.[l] ?? 1;
      const il = powerI?.[l] ?? 1;
      const p = j * n + l;
      const q = l * n + j;
      const [pRe, pIm, qRe, qIm] = [c.re[p]!, c.im[p]!, c.re[q]!, c.im[q]!];
      here += sj * il * (pRe * pRe + pIm * pIm) + sl * ij * (qRe * qRe + qIm * qIm);
      const t = Math.sqrt(sj * il * sl * ij);
      re[n - 1 + j - l]! += t * (pRe * qRe + pIm * qIm);
      im[n - 1 + j - l]! += t * (pIm * qRe - pRe * qIm);
    }
  }
  for (let d = 1; d < n; d++) {
    re[n - 1 - d] = re[n - 1 + d]!;
    im[n - 1 - d] = -im[n - 1 + d]!;
  }
  if (here === 0) return { value: 0, delay: 0 };
  const { value, delay } = maximiseOverDelay(re, im, step);
  // at most 1 by Cauchy & Schwarz; a norm from another grid may miss that by its own error
  return { value: norm === undefined ? value / here : Math.min(value / norm, 1), delay };
}

/**
 * State of one arm, ρ = CC†/Tr CC†, row-major: what the other arm heralds. C may be given as F with filters.
 * @param powerS,powerI filter transmissions per row and column; default 1
 * @throws RangeError if nothing passes
 */
export function heraldedState(c: ComplexMatrix, powerS?: Float64Array, powerI?: Float64Array): ComplexMatrix {
  const { rows: n, cols } = c;
  const re = new Float64Array(n * n);
  const im = new Float64Array(n * n);
  let trace = 0;
  for (let j = 0; j < n; j++) {
    for (let k = 0; k <= j; k++) {
      let sumRe = 0;
      let sumIm = 0;
      for (let l = 0; l < cols; l++) {
        const t = powerI?.[l] ?? 1;
        const p = j * cols + l;
        const q = k * cols + l;
        sumRe += t * (c.re[p]! * c.re[q]! + c.im[p]! * c.im[q]!);
        sumIm += t * (c.im[p]! * c.re[q]! - c.re[p]! * c.im[q]!);
      }
      const t = Math.sqrt((powerS?.[j] ?? 1) * (powerS?.[k] ?? 1));
      re[j * n + k] = re[k * n + j] = t * sumRe;
      im[j * n + k] = t * sumIm;
      im[k * n + j] = -t * sumIm;
    }
    trace += re[j * n + j]!;
  }
  if (!(trace > 0)) {
    throw new RangeError("Cannot herald a state: found no pair behind the filters, need some");
  }
  return { rows: n, cols: n, re: re.map((x) => x / trace), im: im.map((x) => x / trace) };
}

/**
 * Tr(ρ_aρ_b) of two heralded states on one uniform grid, with the best delay between them: the dip of photons from two
 * sources, without multiple pairs. Of a state with itself: its purity.
 * @param step of the grid, rad/s
 * @throws RangeError if the states are not on grids of one size
 */
export function sourceOverlap(a: ComplexMatrix, b: ComplexMatrix, step: number): DelayMaximum {
  const n = a.rows;
  if (b.rows !== n) throw new RangeError(`Cannot overlap states on ${n} and ${b.rows} points: need one grid`);
  const re = new Float64Array(2 * n - 1);
  const im = new Float64Array(2 * n - 1);
  for (let j = 0; j < n; j++) {
    for (let k = 0; k < n; k++) {
      const p = j * n + k;
      // ρ_a(j,k)·ρ_b(k,j), and ρ_b(k,j) = ρ_b(j,k)*
      re[n - 1 + k - j]! += a.re[p]! * b.re[p]! + a.im[p]! * b.im[p]!;
      im[n - 1 + k - j]! += a.im[p]! * b.re[p]! - a.re[p]! * b.im[p]!;
    }
  }
  return maximiseOverDelay(re, im, step);
}

/** Visibility (C_max − C_min)/C_max of a dip. @throws RangeError unless C_max > 0 and 0 <= C_min <= C_max */
export function dipVisibility(most: number, least: number): number {
  if (!(most > 0 && least >= 0 && least <= most)) {
    throw new RangeError(
      `Cannot take a visibility: found counts ${most} and ${least}, need 0 <= least <= most > 0`,
    );
  }
  return (most - least) / most;
}

/** The same depth by (C_max − C_min)/(C_max + C_min): V/(2 − V). */
export const contrastVisibility = (visibility: number): number => visibility / (2 - visibility);

/** What a lossless splitter leaves of a dip: 2RT/(R²+T²), 1 at R = ½. @throws RangeError for R outside 0…1 */
export function splitterFactor(reflectivity: number): number {
  if (!(reflectivity >= 0 && reflectivity <= 1)) {
    throw new RangeError(`Cannot split with reflectivity ${reflectivity}: need 0…1`);
  }
  const t = 1 - reflectivity;
  return 2 * reflectivity * t / (reflectivity ** 2 + t ** 2);
}
