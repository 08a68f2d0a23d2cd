// Pure: no I/O, no clock, no hidden randomness.
import FFT from "fft.js";
import { checkGrating, type Grating } from "./grating.ts";
import { checkProfile, type MismatchProfile, profilePieces, thetaOn } from "./profile.ts";

/**
 * What each of many short stretches of a grating contributes to φ near one Δβ. Near the main peak, φ then is a short sum,
 * Σ a_m·e^(ix·z_m), x = Δβ less that of the envelope: good for trying many slow phases on one grating. All at 25 °C.
 */
export interface GratingEnvelope {
  /** Scaled Δβ at which the contributions were taken, 1/m. */
  readonly deltaBeta: number;
  /** Start of the first stretch and length of each, m. */
  readonly start: number;
  readonly step: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/**
 * The envelope of a grating. Its ends count as edges, walls twice; each edge contributes e^(iΔβz + iθ)/(iΔβ) to the stretch
 * that it lies in, so at `deltaBeta` itself the sum is φ up to δβ/Δβ, and farther off each stretch errs by half its own phase.
 * @param stretches into how many equal ones the section is cut
 * @throws RangeError for an invalid grating, profile or number, or Δβ = 0
 */
export function gratingEnvelope(
  grating: Grating,
  deltaBeta: number,
  stretches: number,
  options: { readonly profile?: MismatchProfile; readonly poledLength?: number } = {},
): GratingEnvelope {
  checkGrating(grating);
  if (options.profile !== undefined) checkProfile(options.profile);
  const { walls, start, end } = grating;
  const length = options.poledLength ?? end - start;
  if (!(Number.isSafeInteger(stretches) && stretches >= 1 && Math.abs(deltaBeta) > 0 && length > 0)) {
    throw new RangeError(
      `Cannot cut a grating into ${stretches} stretches at ${deltaBeta} 1/m: need a whole number >= 1 and Δβ other than 0`,
    );
  }
  const step = (end - start) / stretches;
  const re = new Float64Array(stretches);
  const im = new Float64Array(stretches);
  const pieces = profilePieces(options.profile, 1);
  let p = 0;
  const put = (z: number, weight: number) => {
    while (p + 1 < pieces.length && pieces[p + 1]!.from <= z) p++;
    const phase = deltaBeta * z + thetaOn(pieces[p]!, z);
    const m = Math.min(stretches - 1, Math.floor((z - start) / step));
    const size = weight / (deltaBeta * length);
    // 1/i turns the phasor by −90°.
    re[m]! += size * Math.sin(phase);
    im[m]! -= size * Math.cos(phase);
  };
  let sign: number = grating.firstSign;
  put(start, -sign);
  for (const z of walls) {
    put(z, 2 * sign);
    sign = -sign;
  }
  put(end, sign);
  return { deltaBeta, start, step, re, im };
}

/** |φ|² around the Δβ of an envelope. */
export interface EnvelopeCurve {
  /** Highest point: distance from the envelope's Δβ in 1/m, and |φ|². */
  readonly peak: { readonly at: number; readonly power: number };
  /** Full width at half maximum of the main peak, 1/m; null where it does not fall to half. */
  readonly width: number | null;
  /** |φ|² at a distance x (1/m) from the envelope's Δβ; the curve repeats after 2π/step. */
  power(x: number): number;
}

/** Points of the transform per stretch: the phase of the ends turns by π/8 from one to the next. */
const FINER = 8;

/** Curves of one envelope with slow phases θ (rad, one per stretch) added. */
export function envelopeCurves(envelope: GratingEnvelope): (theta?: Float64Array) => EnvelopeCurve {
  const { re, im, step } = envelope;
  const size = 2 ** Math.ceil(Math.log2(FINER * re.length));
  const fft = new FFT(size);
  const input = fft.createComplexArray() as number[];
  const output = fft.createComplexArray() as number[];
  const spacing = 2 * Math.PI / (size * step);
  return (theta) => {
    input.fill(0);
    for (let m = 0; m < re.length; m++) {
      const c = theta === undefined ? 1 : Math.cos(theta[m]!);
      const s = theta === undefined ? 0 : Math.sin(theta[m]!);
      input[2 * m] = re[m]! * c - im[m]! * s;
      // Conjugated, so that the forward transform e^(−i…) gives the conjugate of φ: its power is the same.
      input[2 * m + 1] = -(re[m]! * s + im[m]! * c);
    }
    fft.transform(output, input);
    const power = new Float64Array(size);
    for (let k = 0; k < size; k++) power[k] = output[2 * k]! ** 2 + output[2 * k + 1]! ** 2;
    return curveOf(power, spacing);
  };
}

function curveOf(power: Float64Array, spacing: number): EnvelopeCurve {
  const size = power.length;
  const at = (k: number) => power[k & (size - 1)]!;
  let top = 0;
  for (let k = 1; k < size; k++) if (power[k]! > power[top]!) top = k;
  // A parabola through the highest sample and its neighbours.
  const [before, here, after] = [at(top - 1), at(top), at(top + 1)];
  const bend = before - 2 * here + after;
  const shift = bend === 0 ? 0 : (before - after) / (2 * bend);
  const height = here - (before - after) * shift / 4;
  const signed = (k: number) => k >= size / 2 ? k - size : k;
  const half = (direction: 1 | -1): number | null => {
    for (let n = 1; n < size / 2; n++) {
      const [inner, outer] = [at(top + direction * (n - 1)), at(top + direction * n)];
      if (outer <= height / 2) return n - 1 + (inner - height / 2) / (inner - outer);
    }
    return null;
  };
  const [left, right] = [half(-1), half(1)];
  return {
    peak: { at: (signed(top) + shift) * spacing, power: height },
    width: left === null || right === null ? null : (left + right) * spacing,
    power(x) {
      const t = x / spacing;
      const base = Math.floor(t);
      const f = t - base;
      // Four points, Lagrange.
      const [a, b, c, d] = [at(base - 1), at(base), at(base + 1), at(base + 2)];
      return -a * f * (f - 1) * (f - 2) / 6 + b * (f + 1) * (f - 1) * (f - 2) / 2 -
        c * (f + 1) * f * (f - 2) / 2 + d * (f + 1) * f * (f - 1) / 6;
    },
  };
}
