// Pure: no I/O, no clock, no hidden randomness.
// One eigenpair of the mode matrix: the shift is placed by inertia counts, the mode found by inverse iteration, and the
// residual bounds the error. No dense matrix of the grid is ever made.
import { type BandFactors, factorBand, solveBand } from "./banded_ldl.ts";
import { bandOrder, type ModeMatrix, shiftedBand, timesMatrix } from "./mode_matrix.ts";

/** Working memory that several solutions may share, one after the other. */
export interface Memory {
  band?: Float64Array;
}

/** μ = N² − substrate² with its vector (fᵀMf = 1) and a bound on |error of μ| that the residual gives. */
export interface Eigenpair {
  readonly mu: number;
  readonly vector: Float64Array;
  /** ‖M^−½(A − μM)f‖: some eigenvalue lies within this of μ. */
  readonly residual: number;
  /** Modes with μ above this one. */
  readonly order: number;
}

/** Eigenvalues settle to this share of μ, or to the rounding of the largest matrix element. */
const SETTLED = 1e-12;
const ROUNDING = 2 ** -52;
const ROUNDS = 40;
/** Where modes above one are counted, as a share of μ; two modes nearer than this cannot be told apart. */
const BESIDE = 1e-7;
/** Share of the largest value below which a sign says nothing. */
const NOISE = 1e-5;

function factor(matrix: ModeMatrix, shift: number, memory: Memory): BandFactors {
  const factors = factorBand(shiftedBand(matrix, shift, memory.band));
  memory.band = factors.data;
  return factors;
}

/** Number of modes with N² − substrate² above `shift` (inertia of the shifted matrix). */
export function modesAbove(matrix: ModeMatrix, shift: number, memory: Memory = {}): number {
  return factor(matrix, shift, memory).negative;
}

/**
 * The guided mode of this order (0: the highest index), or null if μ > `floor` has not so many. `guess`: where to look,
 * with an error smaller than the distance to the next mode; without it the place is bisected.
 */
export function eigenpair(
  matrix: ModeMatrix,
  order: number,
  options: { guess?: number; start?: Float64Array; floor?: number; memory?: Memory } = {},
): Eigenpair | null {
  const { start, floor = 0, memory = {} } = options;
  if (options.guess !== undefined && options.guess > floor) {
    const factors = factor(matrix, options.guess, memory);
    // The mode sought is the first below the shift, or the last above it.
    if (factors.negative === order || factors.negative === order + 1) {
      const found = inverseIteration(matrix, factors, options.guess, start);
      if (found !== null && isSought(matrix, found, order, floor, memory)) {
        return { ...found, order };
      }
    }
  }
  if (modesAbove(matrix, floor, memory) <= order) return null;
  let lo = floor;
  let hi = matrix.highest;
  // Until the nearest mode below `hi` is surely the one sought, and near enough to settle fast.
  for (let step = 0; step < 60; step++) {
    const middle = (lo + hi) / 2;
    if (modesAbove(matrix, middle, memory) > order) lo = middle;
    else hi = middle;
    if (step < 3 || hi - lo > 0.02 * (lo + matrix.highest / 50)) continue;
    const factors = factor(matrix, hi, memory);
    const found = inverseIteration(matrix, factors, hi, start);
    if (found !== null && isSought(matrix, found, order, floor, memory)) {
      return { ...found, order };
    }
  }
  throw new RangeError(
    `Cannot solve the mode of order ${order}: found two modes too near to each other at μ = ${hi}, need a larger distance`,
  );
}

/**
 * Proof that a pair is the mode of this order. The fundamental mode alone has no sign change (the couplings are
 * positive: Perron and Frobenius); for the others, the number of modes above them is counted.
 */
function isSought(
  matrix: ModeMatrix,
  { mu, vector }: { mu: number; vector: Float64Array },
  order: number,
  floor: number,
  memory: Memory,
): boolean {
  if (mu <= floor) return false;
  if (order > 0) return modesAbove(matrix, mu * (1 + BESIDE), memory) === order;
  let lowest = 0;
  let highest = 0;
  for (const value of vector) {
    lowest = Math.min(lowest, value);
    highest = Math.max(highest, value);
  }
  return Math.min(-lowest, highest) < NOISE * Math.max(-lowest, highest);
}

/** Inverse iteration at one shift until the Rayleigh quotient stands still. Null if it does not settle. */
function inverseIteration(
  matrix: ModeMatrix,
  factors: BandFactors,
  shift: number,
  start?: Float64Array,
): { mu: number; vector: Float64Array; residual: number } | null {
  const { mass } = matrix;
  const size = mass.length;
  const place = bandOrder(matrix);
  const vector = start === undefined ? unevenStart(matrix) : start.slice();
  const work = new Float64Array(size);
  const root = mass.map(Math.sqrt);
  let stiffest = 0;
  for (let k = 0; k < size; k++) stiffest = Math.max(stiffest, Math.abs(matrix.diagonal[k]!) / mass[k]!);
  let previous = NaN;
  for (let round = 0; round < ROUNDS; round++) {
    for (let k = 0; k < size; k++) work[place(k)] = root[k]! * vector[k]!;
    solveBand(factors, work);
    for (let k = 0; k < size; k++) vector[k] = work[place(k)]! / root[k]!;
    normalise(vector, mass);
    const product = timesMatrix(matrix, vector, work);
    let mu = 0;
    for (let k = 0; k < size; k++) mu += vector[k]! * product[k]!;
    if (!Number.isFinite(mu)) return null;
    let squares = 0;
    for (let k = 0; k < size; k++) squares += (product[k]! - mu * mass[k]! * vector[k]!) ** 2 / mass[k]!;
    const residual = Math.sqrt(squares);
    const tolerance = SETTLED * Math.abs(mu) + ROUNDING * stiffest;
    // The quotient's error is about residual²/gap; standing still with a small residual is both tests at once.
    if (Math.abs(mu - previous) <= tolerance && residual < 1e-5 * (Math.abs(mu) + Math.abs(shift))) {
      return { mu, vector, residual };
    }
    previous = mu;
  }
  return null;
}

/** A start that no mode is orthogonal to by symmetry: it tilts and falls towards the far corner. */
function unevenStart({ nx, ny }: ModeMatrix): Float64Array {
  return Float64Array.from({ length: nx * ny }, (_, k) => {
    const i = (k % nx) / nx;
    const j = Math.floor(k / nx) / ny;
    return Math.exp(-3 * i * i) * (1 + 0.3 * Math.sin(7 * i + 0.4)) * Math.exp(-3 * j * j) * (1 + 0.5 * j);
  });
}

function normalise(vector: Float64Array, mass: Float64Array): void {
  let norm = 0;
  for (let k = 0; k < vector.length; k++) norm += mass[k]! * vector[k]! * vector[k]!;
  const scale = 1 / Math.sqrt(norm);
  for (let k = 0; k < vector.length; k++) vector[k]! *= scale;
}
