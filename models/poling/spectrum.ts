// Pure: no I/O, no clock, no hidden randomness.
import type { Band, Grating } from "./grating.ts";
import { type Edges, gatherEdges } from "./_edges.ts";
import { phasorsInto } from "./_phasor.ts";
import { TYPE1_ERROR, type1Into } from "./_type1.ts";
import { integrateInto } from "./spectrum_direct.ts";
import {
  checkSpectrumInput,
  type GratingSpectrum,
  type SpectrumOptions,
  type SpectrumSetting,
} from "./spectrum_setting.ts";

/** What may be left out of the expansion in δβ/Δβ, relative to the leading term. */
const EXPANSION_ERROR = 3e-8;
/** Above this size of δβ/Δβ the expansion takes too many terms, and the point is integrated plainly. */
const LARGEST_RATIO = 0.15;

/**
 * φ(Δβ) = (1/L)∫ d(z)·e^(iΔβz + iθ(z))·e^(−decay·z) dz over the poled section on a uniform grid of Δβ, z from the
 * input facet, to 1e-6 of the peak. With `scale` s every z is s times its value at 25 °C and so is L: an ideal
 * first-order grating keeps |φ| = 2/π at any temperature, and without decay and profile φ depends on Δβ·s only.
 *
 * Integrating by parts turns each domain into its two ends, Σ_j c_j·e^(Φ_j)·G_j(Δβ): without a profile G = 1/(iΔβ−decay)
 * is common to all, and one non-uniform FFT does the sum. A profile makes G depend on δβ at the wall and on its slope;
 * G is expanded in them, with one transform per order. Points where |Δβ| is so small that this fails are integrated.
 * @throws RangeError for an invalid grating, band or option
 */
export function gratingSpectrum(
  grating: Grating,
  band: Band,
  options: SpectrumOptions = {},
): GratingSpectrum {
  const setting = checkSpectrumInput(grating, band, options);
  const { first, step, count } = band;
  const re = new Float64Array(count);
  const im = new Float64Array(count);
  const edges = gatherEdges(grating, setting);
  const least = leastMismatch(edges, setting);
  // |λ| of the smallest trusted point of the band sets the number of orders.
  let smallest = Infinity;
  for (let k = 0; k < count; k++) {
    const size = sizeOfLambda(first + k * step, edges, setting);
    if (size >= least && size < smallest) smallest = size;
  }
  if (smallest < Infinity) sumEdgesInto(edges, band, setting, smallest, re, im);
  const sum = { re: 0, im: 0 };
  for (let k = 0; k < count; k++) {
    const deltaBeta = first + k * step;
    if (sizeOfLambda(deltaBeta, edges, setting) >= least) continue;
    integrateInto(grating, deltaBeta, setting, sum);
    re[k] = sum.re;
    im[k] = sum.im;
  }
  return { first, step, re, im, centre: setting.centre };
}

/** |Δβ + mean δβ + i·decay|, 1/m. */
function sizeOfLambda(deltaBeta: number, edges: Edges, setting: SpectrumSetting): number {
  const a = deltaBeta + edges.meanDelta;
  return Math.sqrt(a * a + setting.decay * setting.decay);
}

/** Smallest |Δβ + mean δβ + i·decay| at which both the expansion and the rounding of the transform are harmless. */
function leastMismatch(edges: Edges, setting: SpectrumSetting): number {
  const expansion = Math.max(edges.largestDelta, Math.sqrt(3 * edges.largestSlope)) / LARGEST_RATIO;
  // The sum over the edges is divided by |λ|L: near 0 its error would be blown up to 1e-7 of a peak of order one.
  const rounding = TYPE1_ERROR / 1e-7 * edges.sumOfWeights / setting.length;
  return Math.max(expansion, rounding);
}

// Work arrays are kept between calls and grow: overwritten before they are read, so results do not depend on them.
let x = new Float64Array(0);
let cosine = new Float64Array(0);
let sine = new Float64Array(0);
let cRe = new Float64Array(0);
let cIm = new Float64Array(0);
let sumRe = new Float64Array(0);
let sumIm = new Float64Array(0);

/** The transforms of all orders, summed and divided: ψ into re, im. */
function sumEdgesInto(
  edges: Edges,
  band: Band,
  setting: SpectrumSetting,
  smallest: number,
  re: Float64Array,
  im: Float64Array,
): void {
  const { first, step, count } = band;
  const { size, z, theta, delta, slope, weight, meanDelta } = edges;
  const { centre, decay, length } = setting;
  if (x.length < size) {
    [x, cosine, sine, cRe, cIm] = Array.from({ length: 5 }, () => new Float64Array(2 * size)) as Five;
  }
  if (sumRe.length !== count) [sumRe, sumIm] = [new Float64Array(count), new Float64Array(count)];
  // Modulated to the middle of the band: the transform then sees −⌊count/2⌋ … in steps.
  const middle = first + (count >> 1) * step;
  for (let j = 0; j < size; j++) {
    const dz = z[j]! - centre;
    x[j] = step * dz;
    sine[j] = middle * dz + theta[j]!;
    cosine[j] = decay === 0 ? weight[j]! : weight[j]! * Math.exp(-decay * z[j]!);
  }
  phasorsInto(cosine, sine, size, cosine, sine);
  // λ = Δβ + δβ_mean + i·decay, so that iΔβ − decay + iδβ_mean = iλ; ε and slope are taken in units of |λ|, |λ|².
  const ratio = Math.max(edges.largestDelta, Math.sqrt(3 * edges.largestSlope)) / smallest;
  const orders = ratio === 0 ? 1 : Math.max(1, Math.ceil(Math.log(EXPANSION_ERROR) / Math.log(ratio)));
  for (let n = 1; n <= orders; n++) {
    if (n === 1) {
      type1Into(x, cosine, sine, size, sumRe, sumIm);
    } else {
      for (let j = 0; j < size; j++) {
        const w = orderWeight(n, delta[j]! / smallest, slope[j]! / (smallest * smallest));
        cRe[j] = cosine[j]! * w.re - sine[j]! * w.im;
        cIm[j] = cosine[j]! * w.im + sine[j]! * w.re;
      }
      type1Into(x, cRe, cIm, size, sumRe, sumIm);
    }
    for (let k = 0; k < count; k++) {
      // (smallest/λ)^n / (i·smallest·L), by repeated division.
      const a = first + k * step + meanDelta;
      const m2 = a * a + decay * decay;
      const invRe = smallest * a / m2;
      const invIm = -smallest * decay / m2;
      let pRe = invIm / (smallest * length);
      let pIm = -invRe / (smallest * length);
      for (let q = 1; q < n; q++) {
        const t = pRe * invRe - pIm * invIm;
        pIm = pRe * invIm + pIm * invRe;
        pRe = t;
      }
      re[k]! += sumRe[k]! * pRe - sumIm[k]! * pIm;
      im[k]! += sumRe[k]! * pIm + sumIm[k]! * pRe;
    }
  }
}
type Five = [
  Float64Array<ArrayBuffer>,
  Float64Array<ArrayBuffer>,
  Float64Array<ArrayBuffer>,
  Float64Array<ArrayBuffer>,
  Float64Array<ArrayBuffer>,
];

const orderResult = { re: 0, im: 0 };

/**
 * Coefficient of λ^(−n) in iG, where ∫ e^Φ dz = e^Φ·G at an end with Φ′ = i(λ + ε), Φ″ = i·slope. Repeated partial
 * integration gives iG = Σ_b (2b−1)!!·(−i·slope)^b·(λ+ε)^(−2b−1); the powers of λ+ε are binomial series in ε.
 */
function orderWeight(n: number, epsilon: number, slope: number): { re: number; im: number } {
  let re = 0;
  let im = 0;
  let oddFactorial = 1;
  let slopePower = 1;
  for (let b = 0; 2 * b + 1 <= n; b++) {
    if (b > 0) {
      oddFactorial *= 2 * b - 1;
      slopePower *= slope;
      if (slopePower === 0) break;
    }
    const a = n - 1 - 2 * b;
    let term = oddFactorial * slopePower;
    for (let q = 1; q <= a; q++) term *= -epsilon * (2 * b + q) / q;
    // (−i)^b
    if (b % 4 === 0) re += term;
    else if (b % 4 === 1) im -= term;
    else if (b % 4 === 2) re -= term;
    else im += term;
  }
  orderResult.re = re;
  orderResult.im = im;
  return orderResult;
}
