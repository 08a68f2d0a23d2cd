// Pure: no I/O, no clock, no hidden randomness.
// Scalar modes of a one-dimensional graded profile by finite differences: E″ + k0²(n² − N²)E = 0.

/** What lies at the left end (x = 0): a uniform cover, or the middle of a symmetric mode. */
export type LeftEnd = { readonly kind: "cover"; readonly index: number } | { readonly kind: "symmetry" };

/** n²(x) − substrate² for x ≥ 0, in the far field 0; solved on 0 … `extent` (m) with `points` steps. */
export interface GradedProfile {
  readonly substrate: number;
  /** n² − substrate² at distance x (m) from the left end. */
  readonly contrast: (x: number) => number;
  readonly left: LeftEnd;
  readonly extent: number;
  readonly points: number;
}

/** A mode on the nodes x_j = j·step; the field's largest value is 1. */
export interface GradedMode {
  readonly index: number;
  readonly step: number;
  readonly field: Float64Array;
}

/** Symmetric tridiagonal matrix of the profile, in units of N² − substrate². */
interface Tridiagonal {
  readonly diagonal: Float64Array;
  /** Off-diagonal elements: the first one, and all others. */
  readonly firstOff: number;
  readonly off: number;
}

/** `excess`: N² − substrate² that the cover's decay is taken at. */
function matrixOf(profile: GradedProfile, k0: number, points: number, excess: number): Tridiagonal {
  const { substrate, contrast, left, extent } = profile;
  const h = extent / points;
  const off = 1 / (k0 * h) ** 2;
  const diagonal = new Float64Array(points);
  for (let j = 0; j < points; j++) diagonal[j] = contrast(j * h) - 2 * off;
  // Half a cell at the left end keeps the scheme second order there; the cover's exponential is exact.
  if (left.kind === "cover") {
    const decay = Math.sqrt(Math.max(0, excess + substrate ** 2 - left.index ** 2));
    diagonal[0]! -= 2 * decay / (k0 * h);
  }
  return { diagonal, firstOff: Math.SQRT2 * off, off };
}

/** Number of eigenvalues above `x` (Sturm sequence of positive pivots). */
function countAbove({ diagonal, firstOff, off }: Tridiagonal, x: number): number {
  let count = 0;
  let pivot = x - diagonal[0]!;
  if (pivot < 0) count++;
  let squared = firstOff * firstOff;
  for (let j = 1; j < diagonal.length; j++) {
    if (pivot === 0) pivot = 1e-300;
    pivot = x - diagonal[j]! - squared / pivot;
    if (pivot < 0) count++;
    squared = off * off;
  }
  return count;
}

/** N² − substrate² of mode `order` on a grid, or null if that mode is not guided. */
function excessOn(profile: GradedProfile, k0: number, points: number, order: number): number | null {
  let highest = 0;
  for (let j = 0; j < points; j++) highest = Math.max(highest, profile.contrast(j * profile.extent / points));
  let excess = 0;
  // The cover's decay hardly depends on N: three rounds settle it to rounding.
  for (let round = 0; round < (profile.left.kind === "cover" ? 3 : 1); round++) {
    const matrix = matrixOf(profile, k0, points, excess);
    if (countAbove(matrix, 0) <= order) return null;
    let lo = 0;
    let hi = highest;
    for (let step = 0; step < 60 && hi - lo > 1e-14; step++) {
      const middle = (lo + hi) / 2;
      if (countAbove(matrix, middle) > order) lo = middle;
      else hi = middle;
    }
    excess = (lo + hi) / 2;
  }
  return excess;
}

/**
 * Effective index of mode `order` (0 is the fundamental; with a symmetric left end only even modes exist), or null if
 * it is not guided. Second-order differences on `points` and 2·`points` steps, extrapolated to step 0.
 */
export function gradedIndex(profile: GradedProfile, lambda: number, order = 0): number | null {
  const k0 = 2 * Math.PI / lambda;
  const coarse = excessOn(profile, k0, profile.points, order);
  const fine = excessOn(profile, k0, 2 * profile.points, order);
  if (coarse === null || fine === null) return null;
  return Math.sqrt(profile.substrate ** 2 + Math.max(0, (4 * fine - coarse) / 3));
}

/** The fundamental mode with its field on 2·`points` steps, or null if it is not guided. */
export function gradedMode(profile: GradedProfile, lambda: number): GradedMode | null {
  const index = gradedIndex(profile, lambda);
  if (index === null) return null;
  const k0 = 2 * Math.PI / lambda;
  const points = 2 * profile.points;
  const excess = excessOn(profile, k0, points, 0)!;
  const { diagonal, firstOff, off } = matrixOf(profile, k0, points, excess);
  // Inverse iteration just above the highest eigenvalue: shift − A is positive definite, elimination needs no pivots.
  const shift = excess + 1e-9 * (1 + Math.abs(excess));
  const field = new Float64Array(points).fill(1);
  const upper = new Float64Array(points);
  for (let round = 0; round < 6; round++) {
    let pivot = shift - diagonal[0]!;
    field[0]! /= pivot;
    for (let j = 1; j < points; j++) {
      const coupling = j === 1 ? firstOff : off;
      upper[j - 1] = coupling / pivot;
      pivot = shift - diagonal[j]! - coupling * upper[j - 1]!;
      field[j] = (field[j]! + coupling * field[j - 1]!) / pivot;
    }
    for (let j = points - 2; j >= 0; j--) field[j]! += upper[j]! * field[j + 1]!;
    const largest = field.reduce((most, e) => Math.max(most, Math.abs(e)), 0);
    for (let j = 0; j < points; j++) field[j]! /= largest;
  }
  field[0]! *= Math.SQRT2; // undo the symmetrisation of the half cell
  const peak = field.reduce((most, e) => Math.max(most, e), 0);
  return { index, step: profile.extent / points, field: field.map((e) => e / peak) };
}
