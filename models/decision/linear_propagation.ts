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
 *
 * Sums over the draws are made once for all figures of a guide.
 * @returns for a figure and its draws: null when they have no value, or are too few or too wild to tell slopes
 */
export function linearPropagation(
  columns: readonly TraitColumn[],
  size: SampleSize,
): (figure: Figure, draws: Float64Array) => LinearU | null {
  const standard = columns.map(standardised);
  let held: Design | null = null;
  return (figure, draws) => {
    const kept = draws.map((y) => Number.isNaN(y) ? 0 : 1);
    if (held === null || held.kept.some((x, k) => x !== kept[k])) held = designOf(standard, kept, size);
    const roles = RESTS_ON[figure];
    const used = [...columns.keys()].filter((i) =>
      standard[i] !== null && columns[i]!.roles.some((r) => roles.includes(r))
    );
    return propagate(columns, standard, held, used, draws);
  };
}

interface Standardised {
  readonly z: Float64Array;
  readonly sd: number;
}

function standardised({ draws }: TraitColumn): Standardised | null {
  const n = draws.length;
  const centre = draws.reduce((sum, x) => sum + x, 0) / n;
  const sd = Math.sqrt(draws.reduce((sum, x) => sum + (x - centre) ** 2, 0) / (n - 1));
  return sd > 1e-12 * Math.abs(centre) ? { z: draws.map((x) => (x - centre) / sd), sd } : null;
}

/** What all figures with the same draws share. */
interface Design {
  /** 1 for draws that have a value. */
  readonly kept: Float64Array;
  /** Spectrum that a draw takes; all 0 when every draw has its own. */
  readonly group: Int32Array;
  readonly counts: Float64Array;
  /** Columns less the mean of their group, 0 where nothing is kept; and those means. */
  readonly within: readonly (Float64Array | null)[];
  readonly means: readonly (Float64Array | null)[];
  /** Inverse normal matrices within groups, by the columns in them. */
  readonly inverses: Map<string, Matrix | null>;
}

function designOf(
  standard: readonly (Standardised | null)[],
  kept: Float64Array,
  { draws, spectral }: SampleSize,
): Design {
  const groups = draws === spectral ? 1 : spectral;
  const group = Int32Array.from({ length: draws }, (_, k) => k % groups);
  const counts = new Float64Array(groups);
  kept.forEach((x, k) => counts[group[k]!]! += x);
  const split = standard.map((s) => s === null ? null : splitByGroup(s.z, { kept, group, counts }));
  return {
    kept,
    group,
    counts,
    within: split.map((s) => s?.within ?? null),
    means: split.map((s) => s?.means ?? null),
    inverses: new Map(),
  };
}

function splitByGroup(
  x: Float64Array,
  { kept, group, counts }: Pick<Design, "kept" | "group" | "counts">,
): { within: Float64Array; means: Float64Array } {
  const means = new Float64Array(counts.length);
  for (let k = 0; k < x.length; k++) if (kept[k] === 1) means[group[k]!]! += x[k]!;
  for (let j = 0; j < means.length; j++) if (counts[j]! > 0) means[j]! /= counts[j]!;
  const within = new Float64Array(x.length);
  for (let k = 0; k < x.length; k++) if (kept[k] === 1) within[k] = x[k]! - means[group[k]!]!;
  return { within, means };
}

const dot = (a: ArrayLike<number>, b: ArrayLike<number>): number => {
  let sum = 0;
  for (let k = 0; k < a.length; k++) sum += a[k]! * b[k]!;
  return sum;
};

/** Least squares of y on columns: slopes, their variances by chance, and what is left. Null without enough freedom. */
function leastSquares(inverse: Matrix | null, right: readonly number[], square: number, freedom: number) {
  if (inverse === null || freedom < 1) return null;
  const slopes = right.map((_, a) => right.reduce((sum, r, b) => sum + inverse.get(a, b) * r, 0));
  const rest = Math.max(0, square - dot(slopes, right)) / freedom;
  return { slopes, chance: slopes.map((_, a) => rest * inverse.get(a, a)) };
}

function inverseOf(columns: readonly ArrayLike<number>[]): Matrix | null {
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
  return factor.isPositiveDefinite() ? factor.solve(Matrix.eye(m)) : null;
}

function propagate(
  columns: readonly TraitColumn[],
  standard: readonly (Standardised | null)[],
  design: Design,
  used: readonly number[],
  draws: Float64Array,
): LinearU | null {
  const count = dot(design.kept, design.kept);
  const groups = design.counts.filter((c) => c > 0).length;
  if (count < 2) return null;
  const y = splitByGroup(draws, design);
  const grand = dot(y.means, design.counts) / count;
  const variance = (dot(y.within, y.within) +
    y.means.reduce((sum, m, j) => sum + design.counts[j]! * (m - grand) ** 2, 0)) / (count - 1);
  const slopes: (number | null)[] = columns.map(() => null);
  if (used.length === 0 || !(variance > 0)) {
    for (const i of used) slopes[i] = 0;
    return { u: 0, slopes };
  }
  if (count - groups < DRAWS_PER_SLOPE * (used.length + 1)) return null;
  const key = used.join();
  let inverse = design.inverses.get(key);
  if (inverse === undefined) {
    design.inverses.set(key, inverse = inverseOf(used.map((i) => design.within[i]!)));
  }
  const inside = leastSquares(
    inverse,
    used.map((i) => dot(design.within[i]!, y.within)),
    dot(y.within, y.within),
    count - groups - used.length,
  );
  if (inside === null) return null;
  const slope = [...inside.slopes];
  const chance = [...inside.chance];
  if (groups > 1) {
    const across = betweenSpectra(columns, standard, design, used, y.means, inside.slopes, variance);
    if (across === null) return null;
    used.forEach((_, a) => {
      slope[a]! += across.slopes[a]!;
      chance[a]! += across.chance[a]!;
    });
  }
  let square = 0;
  let byChance = 0;
  used.forEach((i, a) => {
    const u = columns[i]!.u / standard[i]!.sd;
    square += u * u * (slope[a]! ** 2 - chance[a]!);
    byChance += u * u * chance[a]!;
    slopes[i] = slope[a]! / standard[i]!.sd;
  });
  if (byChance > CHANCE_SHARE * variance) return null;
  return { u: Math.sqrt(Math.max(0, square)), slopes };
}

/** Slopes with the traits of the draw whose spectrum is taken, from the means of the draws that take it. */
function betweenSpectra(
  columns: readonly TraitColumn[],
  standard: readonly (Standardised | null)[],
  design: Design,
  used: readonly number[],
  means: Float64Array,
  inside: readonly number[],
  variance: number,
) {
  const across = { slopes: used.map(() => 0), chance: used.map(() => 0) };
  const shaping = [...used.keys()].filter((a) =>
    columns[used[a]!]!.roles.some((r) => SHAPES_SPECTRA.includes(r))
  );
  const taken = [...means.keys()].filter((j) => design.counts[j]! > 0);
  const centred = (x: number[]) => {
    const centre = x.reduce((sum, v) => sum + v, 0) / x.length;
    return x.map((v) => v - centre);
  };
  const left = centred(
    taken.map((j) => used.reduce((rest, i, a) => rest - inside[a]! * design.means[i]![j]!, means[j]!)),
  );
  const square = dot(left, left);
  if (shaping.length === 0 || square <= ROUNDING_SHARE * variance * taken.length) return across;
  const xs = shaping.map((a) => centred(taken.map((j) => standard[used[a]!]!.z[j]!)));
  const found = leastSquares(
    inverseOf(xs),
    xs.map((x) => dot(x, left)),
    square,
    taken.length - 1 - shaping.length,
  );
  if (found === null) return null;
  shaping.forEach((a, n) => {
    across.slopes[a] = found.slopes[n]!;
    across.chance[a] = found.chance[n]!;
  });
  return across;
}
