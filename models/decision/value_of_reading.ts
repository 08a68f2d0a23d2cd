// Pure: no I/O, no clock, no hidden randomness.
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import { CholeskyDecomposition, inverse, Matrix } from "ml-matrix";
import { mean } from "../../shared/statistics.ts";
import { decide, type Decision, type Limits } from "./conformity.ts";
import type { TraitDraws } from "./variance_shares.ts";

/** A reading that could be taken: the traits it reads and the standard uncertainty it would have for each. */
export interface ReadingKind {
  readonly kind: string;
  readonly reads: readonly { readonly trait: string; readonly u: number }[];
}

export interface OpenDecision {
  readonly traits: readonly TraitDraws[];
  /** Figures with a requirement; NaN where a draw has no value. */
  readonly figures: readonly { readonly draws: Float64Array; readonly limits: Limits }[];
  readonly thresholds: { readonly acceptAt: number; readonly rejectBelow: number };
}

/** What a reading would be worth before it is taken. */
export interface ReadingValue {
  readonly kind: string;
  /** Doubt now: p(1 − p), the variance of "conforms" as it is known. */
  readonly doubt: number;
  /** Expected fall of the doubt: the variance of p over the outcomes of the reading; 0…doubt. */
  readonly reduction: number;
  /** Probabilities of the decision that follows. */
  readonly after: Readonly<Record<Decision, number>>;
}

/** Outcomes of a reading that are played through. */
const OUTCOMES = 64;
/** A reading is not taken to be better than this share of the trait's own spread. */
const BEST_READING = 1e-4;

/**
 * Expected value of readings for one guide, best first, ties in the order given (preposterior analysis: H. Raiffa &
 * R. Schlaifer, Applied Statistical Decision Theory, 1961; from memory).
 *
 * A reading's outcome y moves the traits' mean by V(V + U)⁻¹(y − mean) and narrows their covariance V to
 * V − V(V + U)⁻¹V. For each of {@link OUTCOMES} outcomes, evenly spread over their distribution, the draws are moved and
 * narrowed alike; every figure follows along its own response to those traits, a quadratic fitted to the draws, and keeps
 * what else made it differ from draw to draw. Then the conforming draws are counted again. Traits that are correlated with
 * the ones read follow by themselves: the response is the one seen in the draws.
 *
 * A draw without a value fails whatever is read.
 * @throws RangeError for a trait without draws, or no draws at all
 */
export function valueOfReadings(question: OpenDecision, kinds: readonly ReadingKind[]): ReadingValue[] {
  const n = question.traits[0]?.draws.length ?? 0;
  if (
    n < 8 || question.figures.some((f) => f.draws.length !== n) ||
    question.traits.some((t) => t.draws.length !== n)
  ) {
    throw new RangeError(
      `Cannot value readings with ${n} draws: need 8 or more, as many for every trait and figure`,
    );
  }
  const { acceptAt, rejectBelow } = question.thresholds;
  const now = conforming(question, question.figures.map((f) => f.draws));
  return kinds.map((kind) => {
    const probabilities = outcomesOf(question, kind, now);
    const average = mean(probabilities);
    const reduction = mean(probabilities.map((p) => (p - average) ** 2));
    const after = { accept: 0, hold: 0, reject: 0 };
    for (const p of probabilities) after[decide(p, { acceptAt, rejectBelow })] += 1 / probabilities.length;
    const doubt = now * (1 - now);
    return { kind: kind.kind, doubt, reduction: Math.min(doubt, reduction), after };
  }).sort((a, b) => b.reduction - a.reduction);
}

function conforming({ figures }: OpenDecision, draws: readonly ArrayLike<number>[]): number {
  const n = draws[0]?.length ?? 0;
  let good = 0;
  for (let k = 0; k < n; k++) {
    if (figures.every(({ limits }, f) => draws[f]![k]! >= limits.atLeast && draws[f]![k]! <= limits.atMost)) {
      good++;
    }
  }
  return n === 0 ? 1 : good / n;
}

/** Probabilities of conformity after each outcome of a reading. */
function outcomesOf(question: OpenDecision, { kind, reads }: ReadingKind, now: number): number[] {
  const columns = reads.map(({ trait, u }) => {
    const found = question.traits.find((t) => t.trait === trait);
    if (found === undefined) throw new RangeError(`Cannot value reading ${kind}: no draws of trait ${trait}`);
    if (!(u >= 0)) throw new RangeError(`Cannot value reading ${kind}: found u ${u} of ${trait}, need u ≥ 0`);
    return { x: found.draws, u };
  });
  const prior = independentColumns(columns);
  if (prior === null || question.figures.length === 0) return [now];
  const { standard, covariance, errors } = prior;
  const m = errors.length;
  const n = standard.length / m;
  const sum = Matrix.add(covariance, Matrix.diag(errors.map((u) => u * u)));
  const moves = covariance.mmul(inverse(sum)).mmul(covariance);
  const shift = lowerFactor(moves);
  const narrow = lowerFactor(Matrix.sub(covariance, moves)).mmul(inverse(lowerFactor(covariance)));
  const narrowed = new Float64Array(n * m);
  for (let k = 0; k < n; k++) {
    for (let a = 0; a < m; a++) {
      for (let b = 0; b < m; b++) narrowed[k * m + a]! += narrow.get(a, b) * standard[k * m + b]!;
    }
  }
  const figures = question.figures.map(({ draws, limits }) => {
    const { linear, square } = response(standard, m, draws);
    // What is left of a draw when the traits that are read have had their say.
    const rest = draws.map((value, k) => {
      let said = 0;
      for (let a = 0; a < m; a++) {
        const x = standard[k * m + a]!;
        said += (linear[a]! + square[a]! * x) * x;
      }
      return value - said;
    });
    return { linear, square, rest, limits };
  });
  const by = new Float64Array(m);
  return evenNormals(m, OUTCOMES).map((z) => {
    for (let a = 0; a < m; a++) {
      by[a] = 0;
      for (let b = 0; b <= a; b++) by[a]! += shift.get(a, b) * z[b]!;
    }
    let good = 0;
    for (let k = 0; k < n; k++) {
      const met = figures.every(({ linear, square, rest, limits }) => {
        let value = rest[k]!;
        for (let a = 0; a < m; a++) {
          const x = narrowed[k * m + a]! + by[a]!;
          value += (linear[a]! + square[a]! * x) * x;
        }
        return value >= limits.atLeast && value <= limits.atMost;
      });
      if (met) good++;
    }
    return good / n;
  });
}

/**
 * Traits in units of their own spread, about their means, without those that the others fix: draw k of trait a is
 * standard[k·m + a]. Null when none varies.
 */
function independentColumns(columns: readonly { readonly x: Float64Array; readonly u: number }[]) {
  const n = columns[0]?.x.length ?? 0;
  const kept: { z: Float64Array; u: number }[] = [];
  for (const { x, u } of columns) {
    const centre = mean(x);
    const sd = Math.sqrt(x.reduce((sum, v) => sum + (v - centre) ** 2, 0) / (n - 1));
    if (!(sd > 1e-12 * Math.abs(centre))) continue;
    const z = x.map((v) => (v - centre) / sd);
    // Two traits with one key have the same draws: read once, both are known.
    const same = kept.some((k) =>
      Math.abs(k.z.reduce((sum, v, i) => sum + v * z[i]!, 0)) / (n - 1) > 1 - 1e-6
    );
    if (!same) kept.push({ z, u: Math.max(u / sd, BEST_READING) });
  }
  if (kept.length === 0) return null;
  const m = kept.length;
  const standard = new Float64Array(n * m);
  kept.forEach(({ z }, a) => z.forEach((v, k) => standard[k * m + a] = v));
  const covariance = Matrix.zeros(m, m);
  kept.forEach(({ z: x }, a) =>
    kept.forEach(({ z: y }, b) => covariance.set(a, b, x.reduce((sum, v, k) => sum + v * y[k]!, 0) / (n - 1)))
  );
  return { standard, covariance, errors: kept.map((k) => k.u) };
}

function lowerFactor(matrix: Matrix): Matrix {
  const m = matrix.rows;
  // Rounding can leave a covariance a little unsymmetric, and an eigenvalue of it a little below 0.
  const symmetric = Matrix.add(matrix, matrix.transpose()).mul(0.5);
  const factor = new CholeskyDecomposition(symmetric.add(Matrix.eye(m).mul(1e-12)));
  return factor.lowerTriangularMatrix;
}

/** Quadratic response of a figure to standardised traits, from the draws in which it exists: Σ (linear + square·x)·x. */
function response(
  standard: Float64Array,
  m: number,
  figure: Float64Array,
): { linear: Float64Array; square: Float64Array } {
  const width = 2 * m + 1;
  const out = { linear: new Float64Array(m), square: new Float64Array(m) };
  const normal = Matrix.zeros(width, width);
  const right = Matrix.zeros(width, 1);
  const row = new Float64Array(width);
  row[0] = 1;
  const existing = figure.filter((y) => Number.isFinite(y));
  if (existing.length < 3 * width) return out;
  // The figure about its mean: normal equations lose no digits to a large constant.
  const centre = mean(existing);
  figure.forEach((y, k) => {
    if (!Number.isFinite(y)) return;
    for (let a = 0; a < m; a++) {
      const x = standard[k * m + a]!;
      row[1 + a] = x;
      row[1 + m + a] = x * x;
    }
    for (let i = 0; i < width; i++) {
      right.set(i, 0, right.get(i, 0) + row[i]! * (y - centre));
      for (let j = 0; j <= i; j++) normal.set(i, j, normal.get(i, j) + row[i]! * row[j]!);
    }
  });
  for (let i = 0; i < width; i++) for (let j = 0; j < i; j++) normal.set(j, i, normal.get(i, j));
  const factor = new CholeskyDecomposition(normal);
  // A trait of two values has the same square everywhere: its bend can't be told, and no response is better than any.
  if (!factor.isPositiveDefinite()) return out;
  const answer = factor.solve(right).to1DArray();
  for (let a = 0; a < m; a++) {
    out.linear[a] = answer[1 + a]!;
    out.square[a] = answer[1 + m + a]!;
  }
  return out;
}

/** Points that fill a standard normal of some dimensions evenly: an additive recurrence with the generalised golden ratio. */
function evenNormals(dimensions: number, count: number): number[][] {
  let ratio = 1.5;
  for (let i = 0; i < 60; i++) ratio = (1 + ratio) ** (1 / (dimensions + 1));
  return Array.from({ length: count }, (_, k) =>
    Array.from({ length: dimensions }, (_, d) => {
      // One dimension: midpoints, exact for what is linear in the outcome.
      const at = dimensions === 1 ? (k + 0.5) / count : (0.5 + (k + 1) * ratio ** -(d + 1)) % 1;
      return normalQuantile(at, 0, 1);
    }));
}
