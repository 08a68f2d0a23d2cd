// Pure: no I/O, no clock, no hidden randomness.
import type { Band } from "./grating.ts";
import type { GratingSpectrum } from "./spectrum_setting.ts";

/**
 * Samples per interpolation. ψ contains the phases e^(iΔβ·y), |y| <= L/2, only. At a step of 2π/(8L) the phase turns by
 * at most π/8 per sample and ten-point Lagrange interpolation in the middle of its points errs by (π/8)¹⁰·872/10! = 2e-8
 * at most; near the ends of the grid, where the points lie to one side, by 8e-7.
 */
const POINTS = 10;
/** Step of the Δβ grid times the stretched length of the section that interpolation needs: 2π/8. */
export const LARGEST_STEP = 2 * Math.PI / 8;

/** 1/Π_{j≠i}(i − j). */
const DENOMINATORS = Float64Array.from({ length: POINTS }, (_, i) => {
  let product = 1;
  for (let j = 0; j < POINTS; j++) if (j !== i) product *= i - j;
  return 1 / product;
});
const weights = new Float64Array(POINTS);

/**
 * A Δβ grid that covers low … high (1/m) with five samples to spare on both sides, fine enough to interpolate the
 * spectrum of a section of `length` (m, stretched) to 1e-6 of its peak.
 * @throws RangeError unless low <= high are finite, length > 0 and the grid has at most 2²² points
 */
export function bandCovering(low: number, high: number, length: number): Band {
  const step = LARGEST_STEP / length;
  const count = Math.ceil((high - low) / step) + POINTS + 1;
  if (!(low <= high && Number.isFinite(low) && Number.isFinite(high) && length > 0 && count <= 2 ** 22)) {
    throw new RangeError(
      `Cannot lay a grid over ${low} … ${high} 1/m for a length of ${length} m: need low <= high, a length > 0 and ` +
        `at most ${2 ** 22} points`,
    );
  }
  return { first: low - POINTS / 2 * step, step, count };
}

/** Fills `weights` for Δβ and returns the first sample that they belong to. */
function weightsAt(s: GratingSpectrum, deltaBeta: number): number {
  const last = s.re.length - 1;
  let t = (deltaBeta - s.first) / s.step;
  if (!(t >= -1e-6 && t <= last + 1e-6) || last < POINTS - 1) {
    throw new RangeError(
      `Cannot interpolate the grating spectrum at ${deltaBeta} 1/m: its ${
        last + 1
      } samples reach from ${s.first} to ` +
        `${s.first + last * s.step} 1/m, need a value inside and at least ${POINTS} samples`,
    );
  }
  const base = Math.min(Math.max(Math.floor(t) - (POINTS / 2 - 1), 0), last - (POINTS - 1));
  t -= base;
  // Π_{j≠i}(t − j) from products taken from the left and from the right: no division, so exact on a sample too.
  let left = 1;
  for (let i = 0; i < POINTS; i++) {
    weights[i] = left * DENOMINATORS[i]!;
    left *= t - i;
  }
  let right = 1;
  for (let i = POINTS - 1; i >= 0; i--) {
    weights[i]! *= right;
    right *= t - i;
  }
  return base;
}

/**
 * ψ(Δβ), without the phase of the centre, to 1e-6 of the peak if step·L·scale <= 2π/8.
 * @throws RangeError outside the band, or if it has fewer than 10 samples
 */
export function interpolateSpectrum(s: GratingSpectrum, deltaBeta: number): { re: number; im: number } {
  const base = weightsAt(s, deltaBeta);
  let re = 0;
  let im = 0;
  for (let i = 0; i < POINTS; i++) {
    re += weights[i]! * s.re[base + i]!;
    im += weights[i]! * s.im[base + i]!;
  }
  return { re, im };
}

/** |φ(Δβ)|², by the same interpolation. @throws RangeError outside the band */
export function spectrumPower(s: GratingSpectrum, deltaBeta: number): number {
  const base = weightsAt(s, deltaBeta);
  let re = 0;
  let im = 0;
  for (let i = 0; i < POINTS; i++) {
    re += weights[i]! * s.re[base + i]!;
    im += weights[i]! * s.im[base + i]!;
  }
  return re * re + im * im;
}

/** Above so many points per sample a finer table pays. */
const FINE_PAYS = 12;
/**
 * The finer table has so many steps per sample: the phase then turns by at most π/32 a step, and six-point interpolation
 * errs by (π/32)⁶·(225/64)/720 = 4.4e-9 in the middle of its points, at the ends of the band by 2.1e-8 at most.
 */
const FINER = 4;
/** Weights at the steps of the finer table between the two samples in the middle. */
const FINE_WEIGHTS = Array.from({ length: FINER }, (_, q) => {
  const t = POINTS / 2 - 1 + q / FINER;
  return DENOMINATORS.map((denominator, i) => {
    let product = denominator;
    for (let j = 0; j < POINTS; j++) if (j !== i) product *= t - j;
    return product;
  });
});
let fineRe = new Float64Array(0);
let fineIm = new Float64Array(0);

/** {@link interpolateSpectrumInto} by way of a table that is fine enough for six points. */
function interpolateFine(
  s: GratingSpectrum,
  deltaBeta: Float64Array,
  outRe: Float64Array,
  outIm: Float64Array,
): void {
  const { first, step, centre } = s;
  const count = FINER * (s.re.length - 1) + 1;
  if (fineRe.length < count) {
    fineRe = new Float64Array(2 * count);
    fineIm = new Float64Array(2 * count);
  }
  const last = s.re.length - POINTS;
  for (let q = 0; q < count; q++) {
    let base = (q / FINER | 0) - (POINTS / 2 - 1);
    let w = FINE_WEIGHTS[q % FINER]!;
    if (base < 0 || base > last) {
      base = weightsAt(s, first + q * step / FINER);
      w = weights;
    }
    let re = 0;
    let im = 0;
    for (let i = 0; i < POINTS; i++) {
      re += w[i]! * s.re[base + i]!;
      im += w[i]! * s.im[base + i]!;
    }
    fineRe[q] = re;
    fineIm[q] = im;
  }
  const [tableRe, tableIm] = [fineRe, fineIm];
  const perStep = FINER / step;
  for (let k = 0; k < deltaBeta.length; k++) {
    const x = deltaBeta[k]!;
    const at = (x - first) * perStep;
    // Out of the band: the slow route says so.
    if (!(at >= 0 && at <= count - 1)) weightsAt(s, x);
    let base = Math.floor(at) - 2;
    base = base < 0 ? 0 : base > count - 6 ? count - 6 : base;
    const t0 = at - base, t1 = t0 - 1, t2 = t0 - 2, t3 = t0 - 3, t4 = t0 - 4, t5 = t0 - 5;
    const ab = t0 * t1, cd = t2 * t3, ef = t4 * t5;
    const w0 = -t1 * cd * ef / 120, w1 = t0 * cd * ef / 24, w2 = -ab * t3 * ef / 12;
    const w3 = ab * t2 * ef / 12, w4 = -ab * cd * t5 / 24, w5 = ab * cd * t4 / 120;
    const re = w0 * tableRe[base]! + w1 * tableRe[base + 1]! + w2 * tableRe[base + 2]! +
      w3 * tableRe[base + 3]! + w4 * tableRe[base + 4]! + w5 * tableRe[base + 5]!;
    const im = w0 * tableIm[base]! + w1 * tableIm[base + 1]! + w2 * tableIm[base + 2]! +
      w3 * tableIm[base + 3]! + w4 * tableIm[base + 4]! + w5 * tableIm[base + 5]!;
    if (centre === 0) {
      outRe[k] = re;
      outIm[k] = im;
      continue;
    }
    const c = Math.cos(x * centre);
    const sn = Math.sin(x * centre);
    outRe[k] = c * re - sn * im;
    outIm[k] = c * im + sn * re;
  }
}

/**
 * φ(Δβ) = exp(iΔβ·centre)·ψ(Δβ) for many Δβ (1/m, any order) into outRe, outIm, which may be `deltaBeta` itself.
 * @throws RangeError outside the band, for NaN, or if the arrays differ in length
 */
export function interpolateSpectrumInto(
  s: GratingSpectrum,
  deltaBeta: Float64Array,
  outRe: Float64Array,
  outIm: Float64Array,
): void {
  if (outRe.length !== deltaBeta.length || outIm.length !== deltaBeta.length) {
    throw new RangeError(
      `Cannot interpolate ${deltaBeta.length} points into arrays of ${outRe.length} and ${outIm.length}: ` +
        "need equal lengths",
    );
  }
  if (deltaBeta.length > FINE_PAYS * s.re.length && s.re.length >= POINTS) {
    interpolateFine(s, deltaBeta, outRe, outIm);
    return;
  }
  const { first, step, re, im, centre } = s;
  const last = re.length - 1;
  const perStep = 1 / step;
  const d = DENOMINATORS;
  const [d0, d1, d2, d3, d4] = [d[0]!, d[1]!, d[2]!, d[3]!, d[4]!];
  for (let k = 0; k < deltaBeta.length; k++) {
    const x = deltaBeta[k]!;
    const at = (x - first) * perStep;
    // Out of the band: the slow route says so.
    if (!(at >= 0 && at <= last) || last < POINTS - 1) weightsAt(s, x);
    const base = Math.min(Math.max(Math.floor(at) - (POINTS / 2 - 1), 0), last - (POINTS - 1));
    // The weights of `weightsAt`, written out: products from the left (l) and from the right (r), in pairs of equal
    // denominators (they are odd about the middle). Half of the time of all draws of a guide is spent here.
    const t0 = at - base, t1 = t0 - 1, t2 = t0 - 2, t3 = t0 - 3, t4 = t0 - 4;
    const t5 = t0 - 5, t6 = t0 - 6, t7 = t0 - 7, t8 = t0 - 8, t9 = t0 - 9;
    const l2 = t0 * t1, l3 = l2 * t2, l4 = l3 * t3, l5 = l4 * t4;
    const l6 = l5 * t5, l7 = l6 * t6, l8 = l7 * t7, l9 = l8 * t8;
    const r7 = t9 * t8, r6 = r7 * t7, r5 = r6 * t6, r4 = r5 * t5;
    const r3 = r4 * t4, r2 = r3 * t3, r1 = r2 * t2, r0 = r1 * t1;
    const w0 = d0 * r0, w1 = d1 * t0 * r1, w2 = d2 * l2 * r2, w3 = d3 * l3 * r3, w4 = d4 * l4 * r4;
    const w5 = -d4 * l5 * r5, w6 = -d3 * l6 * r6, w7 = -d2 * l7 * r7, w8 = -d1 * l8 * t9, w9 = -d0 * l9;
    const a = w0 * re[base]! + w1 * re[base + 1]! + w2 * re[base + 2]! + w3 * re[base + 3]! +
      w4 * re[base + 4]! + w5 * re[base + 5]! + w6 * re[base + 6]! + w7 * re[base + 7]! +
      w8 * re[base + 8]! + w9 * re[base + 9]!;
    const b = w0 * im[base]! + w1 * im[base + 1]! + w2 * im[base + 2]! + w3 * im[base + 3]! +
      w4 * im[base + 4]! + w5 * im[base + 5]! + w6 * im[base + 6]! + w7 * im[base + 7]! +
      w8 * im[base + 8]! + w9 * im[base + 9]!;
    if (centre === 0) {
      outRe[k] = a;
      outIm[k] = b;
      continue;
    }
    const c = Math.cos(x * centre);
    const sn = Math.sin(x * centre);
    outRe[k] = c * a - sn * b;
    outIm[k] = c * b + sn * a;
  }
}
