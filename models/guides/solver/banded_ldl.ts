// Pure: no I/O, no clock, no hidden randomness.
// LDLᵀ of a symmetric banded matrix without pivoting, four columns at a time, and its inertia.

/**
 * Lower half of a symmetric matrix of `size` rows and `band` subdiagonals, by columns: element (j + d, j) is
 * data[j·stride + d], d = 0 … band. `stride` is larger than band + 1; what lies between stays 0.
 */
export interface SymmetricBand {
  readonly size: number;
  readonly band: number;
  readonly stride: number;
  readonly data: Float64Array;
}

/** A band of zeros. `data`: memory to reuse, if it is long enough. */
export function zeroBand(size: number, band: number, data?: Float64Array): SymmetricBand {
  // The panel of four columns reads three rows below the band of its first column, and whole panels only.
  const stride = band + 4;
  const length = (size + band + 8) * stride;
  if (data === undefined || data.length < length) {
    return { size, band, stride, data: new Float64Array(length) };
  }
  data.fill(0, 0, length);
  return { size, band, stride, data };
}

/** Factors in the place of the matrix: unit lower triangle, and the pivots on the diagonal. */
export interface BandFactors extends SymmetricBand {
  /** Number of negative eigenvalues of the matrix (Sylvester's law of inertia). */
  readonly negative: number;
}

/** Columns of one panel. */
const PANEL = 4;

/**
 * Factors `matrix` in place. No pivoting: safe for a definite matrix; for an indefinite one the caller has to look at
 * the residual of what it solves, because a pivot near 0 spoils it.
 */
export function factorBand(matrix: SymmetricBand): BandFactors {
  const { size, band, stride, data } = matrix;
  let negative = 0;
  // Storage goes on behind the last column as zeros, so that the last panel and its targets need no special case.
  for (let first = 0; first < size; first += PANEL) {
    const end = Math.min(first + PANEL, size);
    for (let j = first; j < end; j++) {
      for (let k = first; k < j; k++) {
        const factor = data[k * stride + j - k]! * data[k * stride]!;
        if (factor === 0) continue;
        const from = k * stride - k;
        const to = j * stride - j;
        const last = k + band;
        for (let r = j; r <= last; r++) data[to + r]! -= factor * data[from + r]!;
      }
      const at = j * stride;
      if (data[at] === 0) data[at] = Number.MIN_VALUE ** 0.5;
      const pivot = data[at]!;
      if (pivot < 0) negative++;
      const inverse = 1 / pivot;
      for (let d = 1; d <= band; d++) data[at + d]! *= inverse;
    }
    if (end - first === PANEL) updateBehind(data, stride, band, first, size);
  }
  return { ...matrix, negative };
}

/** Takes the panel's four columns off the two columns behind it at a time. */
function updateBehind(data: Float64Array, stride: number, band: number, first: number, size: number): void {
  const a = first * stride - first;
  const b = a + stride - 1;
  const c = b + stride - 1;
  const d = c + stride - 1;
  const da = data[first * stride]!;
  const db = data[(first + 1) * stride]!;
  const dc = data[(first + 2) * stride]!;
  const dd = data[(first + 3) * stride]!;
  const last = Math.min(first + 3 + band, size - 1);
  for (let t = first + PANEL; t <= last; t += 2) {
    const fa = da * data[a + t]!;
    const fb = db * data[b + t]!;
    const fc = dc * data[c + t]!;
    const fd = dd * data[d + t]!;
    const to = t * stride - t;
    data[to + t]! -= fa * data[a + t]! + fb * data[b + t]! + fc * data[c + t]! + fd * data[d + t]!;
    if (t === last) break;
    const ga = da * data[a + t + 1]!;
    const gb = db * data[b + t + 1]!;
    const gc = dc * data[c + t + 1]!;
    const gd = dd * data[d + t + 1]!;
    const next = to + stride - 1;
    for (let r = t + 1; r <= last; r++) {
      const la = data[a + r]!;
      const lb = data[b + r]!;
      const lc = data[c + r]!;
      const ld = data[d + r]!;
      data[to + r] = data[to + r]! - (fa * la + fb * lb + fc * lc + fd * ld);
      data[next + r] = data[next + r]! - (ga * la + gb * lb + gc * lc + gd * ld);
    }
  }
}

/** Solves the factored system in place. */
export function solveBand({ size, band, stride, data }: BandFactors, x: Float64Array): Float64Array {
  for (let j = 0; j < size; j++) {
    const xj = x[j]!;
    if (xj === 0) continue;
    const at = j * stride;
    const last = Math.min(band, size - 1 - j);
    for (let d = 1; d <= last; d++) x[j + d]! -= xj * data[at + d]!;
  }
  for (let j = 0; j < size; j++) x[j]! /= data[j * stride]!;
  for (let j = size - 1; j >= 0; j--) {
    const at = j * stride;
    const last = Math.min(band, size - 1 - j);
    let sum = 0;
    for (let d = 1; d <= last; d++) sum += data[at + d]! * x[j + d]!;
    x[j]! -= sum;
  }
  return x;
}
