// Pure: no I/O, no clock, no hidden randomness.
import type { Grating } from "./grating.ts";
import { deltaOn, profilePieces, thetaOn } from "./profile.ts";
import type { SpectrumSetting } from "./spectrum_setting.ts";

/**
 * The ends of all domains as sources of a Fourier sum, ascending: walls (weight ±2), start and end (±1), and the knots
 * of the profile inside the section, twice each (±1 with the slopes of both sides). The arrays are shared work space:
 * only the first `size` entries count, and only until the next call.
 */
export interface Edges {
  readonly size: number;
  /** Stretched position, m. */
  readonly z: Float64Array;
  /** θ at the position, rad. */
  readonly theta: Float64Array;
  /** δβ at the position less `meanDelta`, 1/m. */
  readonly delta: Float64Array;
  /** dδβ/dz, 1/m². */
  readonly slope: Float64Array;
  /** d before the edge less d behind it. */
  readonly weight: Float64Array;
  /** Middle of the range of δβ at the edges, 1/m. */
  readonly meanDelta: number;
  readonly largestDelta: number;
  readonly largestSlope: number;
  /** Σ|weight|. */
  readonly sumOfWeights: number;
}

let z = new Float64Array(0);
let theta = new Float64Array(0);
let delta = new Float64Array(0);
let slope = new Float64Array(0);
let weight = new Float64Array(0);

/** Collects the edges of a checked grating. */
export function gatherEdges(grating: Grating, setting: SpectrumSetting): Edges {
  const { walls } = grating;
  const { scale } = setting;
  const pieces = profilePieces(setting.profile, scale);
  const capacity = walls.length + 2 + 2 * pieces.length;
  if (z.length < capacity) {
    z = new Float64Array(2 * capacity);
    theta = new Float64Array(2 * capacity);
    delta = new Float64Array(2 * capacity);
    slope = new Float64Array(2 * capacity);
    weight = new Float64Array(2 * capacity);
  }
  const start = grating.start * scale;
  const end = grating.end * scale;
  if (setting.profile === undefined) return plainEdges(grating, start, end, scale);
  let size = 0;
  let piece = pieces[0]!;
  const put = (at: number, w: number) => {
    z[size] = at;
    theta[size] = thetaOn(piece, at);
    delta[size] = deltaOn(piece, at);
    slope[size] = piece.slope;
    weight[size] = w;
    size++;
  };
  let p = 0;
  while (p + 1 < pieces.length && pieces[p + 1]!.from <= start) piece = pieces[++p]!;
  let sign: number = grating.firstSign;
  put(start, -sign);
  for (let j = 0; j <= walls.length; j++) {
    const wall = j < walls.length ? scale * walls[j]! : end;
    while (p + 1 < pieces.length && pieces[p + 1]!.from < wall) {
      const knot = pieces[p + 1]!.from;
      put(knot, sign);
      piece = pieces[++p]!;
      put(knot, -sign);
    }
    if (j < walls.length) {
      put(wall, 2 * sign);
      sign = -sign;
    } else {
      put(wall, sign);
    }
  }
  return centred(size);
}

/** Edges without a profile: no phase and no slope but zeros. */
function plainEdges({ walls, firstSign }: Grating, start: number, end: number, scale: number): Edges {
  const size = walls.length + 2;
  theta.fill(0, 0, size);
  delta.fill(0, 0, size);
  slope.fill(0, 0, size);
  let sign: number = firstSign;
  z[0] = start;
  weight[0] = -sign;
  for (let j = 0; j < walls.length; j++) {
    z[j + 1] = scale * walls[j]!;
    weight[j + 1] = 2 * sign;
    sign = -sign;
  }
  z[size - 1] = end;
  weight[size - 1] = sign;
  const sumOfWeights = 2 * walls.length + 2;
  return {
    size,
    z,
    theta,
    delta,
    slope,
    weight,
    meanDelta: 0,
    largestDelta: 0,
    largestSlope: 0,
    sumOfWeights,
  };
}

/** Takes the middle of the range out of δβ and finds the largest numbers. */
function centred(size: number): Edges {
  let low = Infinity;
  let high = -Infinity;
  let largestSlope = 0;
  let sum = 0;
  for (let j = 0; j < size; j++) {
    low = Math.min(low, delta[j]!);
    high = Math.max(high, delta[j]!);
    largestSlope = Math.max(largestSlope, Math.abs(slope[j]!));
    sum += Math.abs(weight[j]!);
  }
  const meanDelta = (low + high) / 2;
  if (meanDelta !== 0) { for (let j = 0; j < size; j++) delta[j]! -= meanDelta; }
  return {
    size,
    z,
    theta,
    delta,
    slope,
    weight,
    meanDelta,
    largestDelta: (high - low) / 2,
    largestSlope,
    sumOfWeights: sum,
  };
}
