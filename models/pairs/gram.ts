// Pure: no I/O, no clock, no hidden randomness.

/** A complex matrix, row-major. With `from`/`to`, row j is 0 outside columns from[j] … to[j] − 1. */
export interface ComplexMatrix {
  readonly rows: number;
  readonly cols: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly from?: Int32Array;
  readonly to?: Int32Array;
}

/** Sums over G = F†T_sF (idler × idler, T_s the signal filter's power transmission). */
export interface GramMoments {
  /** Tr G = Tr N_s. */
  readonly trace: number;
  /** Σ_l T_i(l) G_ll = Tr CC†. */
  readonly traceFiltered: number;
  /** Σ_lm |G_lm|² = Tr N_s². */
  readonly square: number;
  /** Σ_lm T_i(l)|G_lm|² = Tr CC†N_s. */
  readonly squareHalf: number;
  /** Σ_lm T_i(l)T_i(m)|G_lm|² = Tr (CC†)². */
  readonly squareFiltered: number;
}

/** Memory of {@link gramMoments}, reused. */
export interface GramScratch {
  re: Float64Array;
  im: Float64Array;
  from: Int32Array;
  to: Int32Array;
}
export const newGramScratch = (): GramScratch => ({
  re: new Float64Array(0),
  im: new Float64Array(0),
  from: new Int32Array(0),
  to: new Int32Array(0),
});

/**
 * All traces that purity and g2 need, from one pass over G: ‖CC†‖² = ‖C†C‖² with C†C = t_iGt_i, so one Gram matrix on
 * the idler's side serves both. G is Hermitian: half of it is summed, in blocks of 2 × 2, and only where both columns
 * of F are lit.
 * @param powerS T_s per row, powerI T_i per column
 */
export function gramMoments(
  f: ComplexMatrix,
  powerS: Float64Array,
  powerI: Float64Array,
  scratch: GramScratch = newGramScratch(),
): GramMoments {
  const stride = transposeInto(f, powerS, scratch);
  const n = f.cols + (f.cols & 1);
  const { re, im, from, to } = scratch;
  let trace = 0, traceFiltered = 0, square = 0, squareHalf = 0, squareFiltered = 0;
  for (let l = 0; l < n; l += 2) {
    const tl = powerI[l]!;
    const tl1 = l + 1 < f.cols ? powerI[l + 1]! : 0;
    const loL = Math.min(from[l]!, from[l + 1]!);
    const hiL = Math.max(to[l]!, to[l + 1]!);
    for (let m = l; m < n; m += 2) {
      const lo = Math.max(loL, Math.min(from[m]!, from[m + 1]!));
      const hi = Math.min(hiL, Math.max(to[m]!, to[m + 1]!));
      if (lo >= hi) continue;
      let aRe = 0, aIm = 0, bRe = 0, bIm = 0, cRe = 0, cIm = 0, dRe = 0, dIm = 0;
      const p0 = l * stride, p1 = p0 + stride, q0 = m * stride, q1 = q0 + stride;
      for (let j = lo; j < hi; j++) {
        const xr = re[p0 + j]!, xi = im[p0 + j]!, yr = re[p1 + j]!, yi = im[p1 + j]!;
        const ur = re[q0 + j]!, ui = im[q0 + j]!, vr = re[q1 + j]!, vi = im[q1 + j]!;
        aRe += xr * ur + xi * ui;
        aIm += xr * ui - xi * ur;
        bRe += xr * vr + xi * vi;
        bIm += xr * vi - xi * vr;
        cRe += yr * ur + yi * ui;
        cIm += yr * ui - yi * ur;
        dRe += yr * vr + yi * vi;
        dIm += yr * vi - yi * vr;
      }
      const a2 = aRe * aRe + aIm * aIm, b2 = bRe * bRe + bIm * bIm;
      const c2 = cRe * cRe + cIm * cIm, d2 = dRe * dRe + dIm * dIm;
      if (m === l) {
        // a and d are on the diagonal, b is above it, c its mirror image
        trace += aRe + dRe;
        traceFiltered += tl * aRe + tl1 * dRe;
        square += a2 + d2 + 2 * b2;
        squareHalf += tl * a2 + tl1 * d2 + (tl + tl1) * b2;
        squareFiltered += tl * tl * a2 + tl1 * tl1 * d2 + 2 * tl * tl1 * b2;
      } else {
        const tm = powerI[m]!;
        const tm1 = m + 1 < f.cols ? powerI[m + 1]! : 0;
        square += 2 * (a2 + b2 + c2 + d2);
        squareHalf += (tl + tm) * a2 + (tl + tm1) * b2 + (tl1 + tm) * c2 + (tl1 + tm1) * d2;
        squareFiltered += 2 * (tl * (tm * a2 + tm1 * b2) + tl1 * (tm * c2 + tm1 * d2));
      }
    }
  }
  return { trace, traceFiltered, square, squareHalf, squareFiltered };
}

/** Row l of the scratch: column l of t_sF without the rows that the signal filter blocks. Returns the row length. */
function transposeInto(f: ComplexMatrix, powerS: Float64Array, scratch: GramScratch): number {
  const { rows, cols } = f;
  let kept = 0;
  for (let j = 0; j < rows; j++) if (powerS[j]! > 0) kept++;
  const n = cols + (cols & 1);
  if (scratch.re.length < n * kept) {
    scratch.re = new Float64Array(n * kept);
    scratch.im = new Float64Array(n * kept);
  } else {
    scratch.re.fill(0, 0, n * kept);
    scratch.im.fill(0, 0, n * kept);
  }
  if (scratch.from.length < n) {
    scratch.from = new Int32Array(n);
    scratch.to = new Int32Array(n);
  }
  const { re, im, from, to } = scratch;
  from.fill(kept, 0, n);
  to.fill(0, 0, n);
  let at = 0;
  for (let j = 0; j < rows; j++) {
    if (!(powerS[j]! > 0)) continue;
    const t = Math.sqrt(powerS[j]!);
    const end = f.to === undefined ? cols : f.to[j]!;
    for (let l = f.from === undefined ? 0 : f.from[j]!; l < end; l++) {
      re[l * kept + at] = t * f.re[j * cols + l]!;
      im[l * kept + at] = t * f.im[j * cols + l]!;
      if (at < from[l]!) from[l] = at;
      to[l] = at + 1;
    }
    at++;
  }
  return kept;
}
