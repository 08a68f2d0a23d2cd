// Pure: no I/O, no clock, no hidden randomness.
import { Matrix, SingularValueDecomposition } from "ml-matrix";
import { fTail } from "../tails.ts";

/** A value at a place on the wafer. */
export interface SiteValue {
  /** m from the wafer's centre. */
  readonly x: number;
  readonly y: number;
  /** NaN: no value here. */
  readonly value: number;
  /** Relative weight, ∝ 1/variance with the scatter from die to die included; default 1. */
  readonly weight?: number;
}

/** No answer, and why. */
export interface NoAnswer {
  readonly refused: string;
}

/** An F test of some terms given the others. */
export interface TermTest {
  readonly f: number;
  readonly df1: number;
  readonly df2: number;
  readonly p: number;
}

/** The sites that have a value. @throws RangeError for a place or weight that is no number */
export function usableSites(sites: readonly SiteValue[]): SiteValue[] {
  for (const s of sites) {
    const weight = s.weight ?? 1;
    if (
      !Number.isFinite(s.x) || !Number.isFinite(s.y) || Math.abs(s.value) === Infinity ||
      !(weight > 0 && weight < Infinity)
    ) {
      throw new RangeError(
        `Cannot fit the value ${s.value} at (${s.x}, ${s.y}) with weight ${weight}: need finite places and values, weights > 0`,
      );
    }
  }
  return sites.filter((s) => !Number.isNaN(s.value));
}

/** Distance of the outermost site from the centre, m. */
export function outermost(sites: readonly SiteValue[]): number {
  return sites.reduce((r, s) => Math.max(r, Math.hypot(s.x, s.y)), 0);
}

export type Term = (site: SiteValue) => number;

export interface SiteFit {
  readonly rank: number;
  readonly rss: number;
  /** Per term, null if the sites don't determine all of them. */
  readonly coefficients: readonly number[] | null;
  /** Diagonal of (XᵀWX)⁻¹. */
  readonly inverse: readonly number[] | null;
  /** Orthonormal basis of the weighted terms, by columns. */
  readonly basis: Matrix;
}

/** Singular values below this share of the largest belong to combinations that the sites don't determine. */
const RANK_TOLERANCE = 1e-7;

/**
 * Weighted least squares of terms that are of order 1 over the sites. The singular value decomposition finds which
 * combinations the places determine: dies on one ring have no radial term, dies on a line no slope across it.
 */
export function fitTerms(sites: readonly SiteValue[], terms: readonly Term[]): SiteFit {
  const roots = sites.map((s) => Math.sqrt(s.weight ?? 1));
  const centre = weightedCentre(sites);
  // Centred first: a trend of 1e-9 on a value of 1 would drown in its rounding.
  const y = sites.map((s, i) => roots[i]! * (s.value - centre));
  const x = new Matrix(sites.map((s, i) => terms.map((t) => roots[i]! * t(s))));
  const svd = new SingularValueDecomposition(x, { autoTranspose: true });
  const keep = svd.diagonal.map((s, k) => ({ s, k })).filter(({ s }) =>
    s > RANK_TOLERANCE * svd.diagonal[0]!
  );
  const u = svd.leftSingularVectors;
  const basis = new Matrix(sites.map((_, i) => keep.map(({ k }) => u.get(i, k))));
  const amounts = keep.map((_, j) => y.reduce((sum, v, i) => sum + v * basis.get(i, j), 0));
  let rss = 0;
  for (let i = 0; i < y.length; i++) {
    const fitted = amounts.reduce((sum, a, j) => sum + a * basis.get(i, j), 0);
    rss += (y[i]! - fitted) ** 2;
  }
  const rank = keep.length;
  if (rank < terms.length) return { rank, rss, coefficients: null, inverse: null, basis };
  const v = svd.rightSingularVectors;
  const coefficients = terms.map((_, t) =>
    keep.reduce((sum, { s, k }, j) => sum + v.get(t, k) * amounts[j]! / s, 0)
  );
  const inverse = terms.map((_, t) => keep.reduce((sum, { s, k }) => sum + (v.get(t, k) / s) ** 2, 0));
  // The first term is the constant: give back what was taken off.
  coefficients[0]! += centre;
  return { rank, rss, coefficients, inverse, basis };
}

/** Weighted mean of the values. */
export function weightedCentre(sites: readonly SiteValue[]): number {
  // Relative to the first value: equal values then have exactly it as their mean.
  const first = sites[0]!.value;
  const weights = sites.reduce((sum, s) => sum + (s.weight ?? 1), 0);
  return first + sites.reduce((sum, s) => sum + (s.weight ?? 1) * (s.value - first), 0) / weights;
}

/**
 * Sum of squares below which residuals are rounding: values made by a formula lie on their surface exactly, and
 * ratios of what is left mean nothing.
 */
export function roundingSquares(sites: readonly SiteValue[]): number {
  return sites.reduce((sum, s) => sum + (s.weight ?? 1) * (1e-13 * s.value) ** 2, 0) +
    1e-24 * fitTerms(sites, [() => 1]).rss;
}

/** F test of the terms that `full` has and `reduced` lacks. */
export function compareFits(
  full: SiteFit,
  reduced: SiteFit,
  sites: readonly SiteValue[],
  what: string,
): TermTest | NoAnswer {
  const df1 = full.rank - reduced.rank;
  const df2 = sites.length - full.rank;
  if (df1 < 1) return { refused: `the places of the dies don't determine ${what}` };
  if (df2 < 2) return { refused: `${what} needs at least ${full.rank + 2} dies, found ${sites.length}` };
  const rounding = roundingSquares(sites);
  if (reduced.rss <= rounding) return { f: 0, df1, df2, p: 1 };
  const f = full.rss <= rounding ? Infinity : Math.max(0, reduced.rss - full.rss) / df1 / (full.rss / df2);
  return { f, df1, df2, p: fTail(f, df1, df2) };
}

/** True when the values differ by no more than rounding. */
export function allEqual(sites: readonly SiteValue[]): boolean {
  const least = sites.reduce((m, s) => Math.min(m, s.value), Infinity);
  const most = sites.reduce((m, s) => Math.max(m, s.value), -Infinity);
  return most - least <= 1e-12 * Math.max(Math.abs(least), Math.abs(most));
}
