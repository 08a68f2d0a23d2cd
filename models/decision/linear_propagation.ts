// Pure: no I/O, no clock, no hidden randomness.
import { CholeskyDecomposition, Matrix } from "ml-matrix";
import type { Figure } from "../../shared/schemas/figures.ts";
import type { SampleSize } from "./draws.ts";
import type { TraitColumn } from "./drawn_traits.ts";
import { RESTS_ON, type Role } from "./figure_basis.ts";

/** A figure's standard uncertainty from its slopes with the traits. */
export interface LinearU {
  readonly u: number;
  /** By position of the column: figure's unit per trait's unit; null for traits without spread or not under the figure. */
  readonly slopes: readonly (number | null)[];
}

/** Slopes of m traits need this many draws for each. */
const DRAWS_PER_SLOPE = 3;
/** Where chance alone would make more than this share of a figure's variance, its slopes can't be told. */
const CHANCE_SHARE = 0.1;
/** What a figure differs by between spectra is rounding below this share of its variance. */
const ROUNDING_SHARE = 1e-12;
/** Roles whose draws shape a spectrum. */
const SHAPES_SPECTRA: readonly Role[] = ["poling", "pump_loss"];

/**
 * Linear propagation beside sampling (JCGM 100:2008, 5.1): u² = Σ(slopeᵢ·uᵢ)² over the traits that a figure rests on, slopes
 * by least squares over the draws. With the stated uᵢ, so that it also shows what a trait's natural bounds do to the sample.
 *
 * Draw k takes the spectrum of draw j = k mod S: y = f(x_k, x_j). Slopes with x_k are found within draws of one spectrum,
 * where whatever else makes spectra differ cancels; those with x_j between the spectra. A trait's slope is the sum of both.
 * The squares of slopes are freed of what chance adds to them. What gratings of equal statistics differ by is left out.
 * Sums over the draws are made once for all figures of a guide.
 * @returns for a figure and its draws: null when they have no value, or are too few or too wild to tell slopes
 */
export function linearPropagation(
  columns: readonly TraitColumn[],
  size: SampleSize,
): (figure: Figure, draws: Float64Array) => LinearU | null {
  const standard = columns.map(standardised);
  const designs: Design[] = [];
  const designFor = (draws: Float64Array): Design => {
    const found = designs.find(({ kept }) => kept.every((x, k) => (x === 0) === Number.isNaN(draws[k]!)));
    if (found !== undefined) return found;
    const made = designOf(standard, draws.map((y) => Number.isNaN(y) ? 0 : 1), size);
    designs.push(made);
    return made;
  };
  return (figure, draws) => {
    const slopes: (number | null)[] = columns.map(() => null);
    const roles = RESTS_ON[figure];
    const used = [...columns.keys()].filter((i) =>
      standard[i] !== null && columns[i]!.roles.some((r) => roles.includes(r))
    );
    if (draws.every((y) => y === draws[0])) {
      for (const i of used) slopes[i] = 0;
      return { u: 0, slopes };
    }
    return propagate(columns, standard, designFor(draws), used, draws, slopes);
  };
}

interface Standardised {
  readonly z: Float64Array;
  readonly sd: number;
}

function standardised({ draws }: TraitColumn): Standardised | null {
  const n = draws.length;
  let centre = 0;
  for (let k = 0; k < n; k++) centre += draws[k]! / n;
  let square = 0;
  for (let k = 0; k < n; k++) square += (draws[k]! - centre) ** 2;
  const sd = Math.sqrt(square / (n - 1));
  return sd > 1e-12 * Math.abs(centre) ? { z: draws.map((x) => (x - centre) / sd), sd } : null;
}

/** What all figures with values in the same draws share. */
interface Design {
  /** 1 for draws that have a value. */
  readonly kept: Float64Array;
  /** Draws with a value by the spectrum that they take; one group when every draw has its own. */
  readonly counts: Float64Array;
  readonly count: number;
  readonly groups: number;
  /** Columns less the mean of their group, 0 where nothing is kept; and those means. */
  readonly within: readonly (Float64Array | null)[];
  readonly means: readonly (Float64Array | null)[];
  /** Inverse normal matrices by the columns in them. */
  readonly inverses: Map<string, Matrix | null>;
}

function designOf(
  standard: readonly (Standardised | null)[],
  kept: Float64Array,
  { draws, spectral }: SampleSize,
): Design {
  const counts = new Float64Array(draws === spectral ? 1 : spectral);
  kept.forEach((x, k) => counts[k % counts.length]! += x);
  const split = standard.map((s) => s === null ? null : splitByGroup(s.z, { kept, counts }));
  return {
    kept,
    counts,
    count: kept.reduce((sum, x) => sum + x, 0),
    groups: counts.filter((c) => c > 0).length,
    within: split.map((s) => s?.within ?? null),
    means: split.map((s) => s?.means ?? null),
    inverses: new Map(),
  };
}

function splitByGroup(
  x: Float64Array,
  { kept, counts }: Pick<Design, "kept" | "counts">,
): { within: Float64Array; means: Float64Array } {
  const groups = counts.length;
  const means = new Float64Array(groups);
  for (let k = 0; k < x.length; k++) if (kept[k] === 1) means[k % groups]! += x[k]!;
  for (let j = 0; j < groups; j++) if (counts[j]! > 0) means[j]! /= counts[j]!;
  const within = new Float64Array(x.length);
  for (let k = 0; k < x.length; k++) if (kept[k] === 1) within[k] = x[k]! - means[k % groups]!;
  return { within, means };
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let k = 0; k < a.length; k++) sum += a[k]! * b[k]!;
  return sum;
}

/** Slopes of y with columns by least squares, and their variances by chance. Null without enough freedom. */
function leastSquares(inverse: Matrix | null, right: Float64Array, square: number, freedom: number) {
  if (inverse === null || freedom < 1) return null;
  const slopes = right.map((_, a) => {
    let sum = 0;
    for (let b = 0; b < right.length; b++) sum += inverse.get(a, b) * right[b]!;
    return sum;
  });
  const rest = Math.max(0, square - dot(slopes, right)) / freedom;
  return { slopes, chance: slopes.map((_, a) => rest * inverse.get(a, a)) };
}

/** Inverse of the columns' normal matrix, made once for all figures; null where they do not tell each other apart. */
function inverseOf({ inverses }: Design, name: string, columns: readonly Float64Array[]): Matrix | null {
  const held = inverses.get(name);
  if (held !== undefined) return held;
  const m = columns.length;
  const normal = Matrix.zeros(m, m);
  columns.forEach((a, i) => {
    for (let j = 0; j <= i; j++) {
      const sum = dot(a, columns[j]!);
      normal.set(i, j, sum);
      normal.set(j, i, sum);
    }
  });
  const factor = new CholeskyDecomposition(normal);
  const made = factor.isPositiveDefinite() ? factor.solve(Matrix.eye(m)) : null;
  inverses.set(name, made);
  return made;
}

function propagate(
  columns: readonly TraitColumn[],
  standard: readonly (Standardised | null)[],
  design: Design,
  used: readonly number[],
  draws: Float64Array,
  slopes: (number | null)[],
): LinearU | null {
  const { count, groups, counts } = design;
  if (count < 2) return null;
  const y = splitByGroup(draws, design);
  const grand = dot(y.means, counts) / count;
  const square = dot(y.within, y.within);
  let variance = square;
  for (let j = 0; j < counts.length; j++) variance += counts[j]! * (y.means[j]! - grand) ** 2;
  variance /= count - 1;
  if (used.length === 0 || !(variance > 0)) {
    for (const i of used) slopes[i] = 0;
    return { u: 0, slopes };
  }
  if (count - groups < DRAWS_PER_SLOPE * (used.length + 1)) return null;
  const xs = used.map((i) => design.within[i]!);
  const inside = leastSquares(
    inverseOf(design, `within ${used}`, xs),
    Float64Array.from(xs, (x) => dot(x, y.within)),
    square,
    count - groups - used.length,
  );
  if (inside === null) return null;
  const { slopes: slope, chance } = inside;
  if (groups > 1 && !addBetweenSpectra(columns, standard, design, used, y.means, variance, inside)) {
    return null;
  }
  let linear = 0;
  let byChance = 0;
  used.forEach((i, a) => {
    const u = columns[i]!.u / standard[i]!.sd;
    linear += u * u * (slope[a]! ** 2 - chance[a]!);
    byChance += u * u * chance[a]!;
    slopes[i] = slope[a]! / standard[i]!.sd;
  });
  if (byChance > CHANCE_SHARE * variance) return null;
  return { u: Math.sqrt(Math.max(0, linear)), slopes };
}

/**
 * Adds the slopes with the traits of the draw whose spectrum is taken, from the means of the draws that take it.
 * @returns false where they can't be told
 */
function addBetweenSpectra(
  columns: readonly TraitColumn[],
  standard: readonly (Standardised | null)[],
  design: Design,
  used: readonly number[],
  means: Float64Array,
  variance: number,
  { slopes, chance }: { slopes: Float64Array; chance: Float64Array },
): boolean {
  const shaping = [...used.keys()].filter((a) =>
    columns[used[a]!]!.roles.some((r) => SHAPES_SPECTRA.includes(r))
  );
  if (shaping.length === 0) return true;
  const taken = Int32Array.from(means.keys()).filter((j) => design.counts[j]! > 0);
  const left = centred(Float64Array.from(taken, (j) => {
    let rest = means[j]!;
    for (let a = 0; a < used.length; a++) rest -= slopes[a]! * design.means[used[a]!]![j]!;
    return rest;
  }));
  const square = dot(left, left);
  if (square <= ROUNDING_SHARE * variance * taken.length) return true;
  const xs = shaping.map((a) => {
    const { z } = standard[used[a]!]!;
    return centred(Float64Array.from(taken, (j) => z[j]!));
  });
  const found = leastSquares(
    inverseOf(design, `between ${shaping.map((a) => used[a])}`, xs),
    Float64Array.from(xs, (x) => dot(x, left)),
    square,
    taken.length - 1 - shaping.length,
  );
  if (found === null) return false;
  shaping.forEach((a, n) => {
    slopes[a]! += found.slopes[n]!;
    chance[a]! += found.chance[n]!;
  });
  return true;
}

function centred(x: Float64Array): Float64Array {
  const centre = x.reduce((sum, v) => sum + v, 0) / x.length;
  return x.map((v) => v - centre);
}
