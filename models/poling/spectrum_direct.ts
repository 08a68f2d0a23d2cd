// Pure: no I/O, no clock, no hidden randomness.
import type { Band, Grating } from "./grating.ts";
import { deltaOn, profilePieces, thetaOn } from "./profile.ts";
import {
  checkSpectrumInput,
  type GratingSpectrum,
  type SpectrumOptions,
  type SpectrumSetting,
} from "./spectrum_setting.ts";

/**
 * The same as `gratingSpectrum` by plain integration, domain by domain: the yardstick for the fast transform, and good
 * for a few points. Where δβ is constant a domain has a closed form, elsewhere it is integrated by Gauss–Legendre
 * quadrature over pieces of at most 2 rad.
 * @throws RangeError for an invalid grating, band or option
 */
export function gratingSpectrumDirect(
  grating: Grating,
  band: Band,
  options: SpectrumOptions = {},
): GratingSpectrum {
  const setting = checkSpectrumInput(grating, band, options);
  const re = new Float64Array(band.count);
  const im = new Float64Array(band.count);
  const sum = { re: 0, im: 0 };
  for (let k = 0; k < band.count; k++) {
    integrateInto(grating, band.first + k * band.step, setting, sum);
    re[k] = sum.re;
    im[k] = sum.im;
  }
  return { first: band.first, step: band.step, re, im, centre: setting.centre };
}

// Abscissae and weights of the 8-point Gauss–Legendre rule on [−1, 1], positive half (Abramowitz & Stegun, table 25.4).
const NODES = [0.183434642495650, 0.525532409916329, 0.796666477413627, 0.960289856497536];
const WEIGHTS = [0.362683783378362, 0.313706645877887, 0.222381034453374, 0.101228536290376];

/** ψ at one Δβ into `sum`. The inputs have been checked. */
export function integrateInto(
  grating: Grating,
  deltaBeta: number,
  setting: SpectrumSetting,
  sum: { re: number; im: number },
): void {
  const { walls } = grating;
  const { decay, scale, centre, length } = setting;
  const pieces = profilePieces(setting.profile, scale);
  let re = 0;
  let im = 0;
  const add = (z: number, theta: number, weight: number) => {
    const phase = deltaBeta * (z - centre) + theta;
    const size = weight * Math.exp(-decay * z);
    re += size * Math.cos(phase);
    im += size * Math.sin(phase);
  };
  let p = 0;
  let from = grating.start * scale;
  let sign: number = grating.firstSign;
  for (let j = 0; j <= walls.length; j++) {
    const wall = scale * (j < walls.length ? walls[j]! : grating.end);
    while (from < wall) {
      while (p + 1 < pieces.length && pieces[p + 1]!.from <= from) p++;
      const piece = pieces[p]!;
      const to = p + 1 < pieces.length ? Math.min(wall, pieces[p + 1]!.from) : wall;
      if (piece.slope === 0) {
        // ∫ e^(κz) dz over a width h is e^(κ·middle)·h·sinh(κh/2)/(κh/2), κ = i(Δβ + δβ) − decay.
        const middle = (from + to) / 2;
        const h = to - from;
        const shape = sinhc(-decay * h / 2, (deltaBeta + piece.delta) * h / 2);
        const phase = deltaBeta * (middle - centre) + thetaOn(piece, middle);
        const size = sign * h * Math.exp(-decay * middle);
        const c = size * Math.cos(phase);
        const s = size * Math.sin(phase);
        re += c * shape.re - s * shape.im;
        im += c * shape.im + s * shape.re;
      } else {
        const fastest = Math.abs(decay) + Math.max(
          Math.abs(deltaBeta + deltaOn(piece, from)),
          Math.abs(deltaBeta + deltaOn(piece, to)),
        );
        const parts = Math.max(1, Math.ceil(fastest * (to - from) / 2));
        const h = (to - from) / parts;
        for (let part = 0; part < parts; part++) {
          const middle = from + (part + 0.5) * h;
          for (let q = 0; q < NODES.length; q++) {
            const dz = NODES[q]! * h / 2;
            const weight = sign * WEIGHTS[q]! * h / 2;
            add(middle - dz, thetaOn(piece, middle - dz), weight);
            add(middle + dz, thetaOn(piece, middle + dz), weight);
          }
        }
      }
      from = to;
    }
    sign = -sign;
  }
  sum.re = re / length;
  sum.im = im / length;
}

/** sinh(w)/w of w = x + iy; by its series near 0, where the quotient loses digits. */
function sinhc(x: number, y: number): { re: number; im: number } {
  const m2 = x * x + y * y;
  if (m2 < 1e-4) {
    // 1 + w²/6 + w⁴/120
    const re2 = x * x - y * y;
    const im2 = 2 * x * y;
    return {
      re: 1 + re2 / 6 + (re2 * re2 - im2 * im2) / 120,
      im: im2 / 6 + 2 * re2 * im2 / 120,
    };
  }
  const a = Math.sinh(x) * Math.cos(y);
  const b = Math.cosh(x) * Math.sin(y);
  return { re: (a * x + b * y) / m2, im: (b * x - a * y) / m2 };
}
