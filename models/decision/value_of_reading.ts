// Pure: no I/O, no clock, no hidden randomness.
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import { CholeskyDecomposition, inverse, Matrix, solve } from "ml-matrix";
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
  if (prior === null) return [now];
  const { standard, covariance, errors } = prior;
  const m = errors.length;
  const sum = Matrix.add(covariance, Matrix.diag(errors.map((u) => u * u)));
  const moves = covariance.mmul(inverse(sum)).mmul(covariance);
  const shift = lowerFactor(moves);
  const narrow = lowerFactor(Matrix.sub(covariance, moves)).mmul(inverse(lowerFactor(covariance)));
  const responses = question.figures.map((f) => response(standard, f.draws));
  const narrowed = standard.map((row) => narrow.mmul(Matrix.columnVector(row)).to1DArray());
  return evenNormals(m, OUTCOMES).map((z) => {
    const by = shift.mmul(Matrix.columnVector(z)).to1DArray();
    const moved = narrowed.map((row) => row.map((x, a) => x + by[a]!));
    const figures = question.figures.map(({ draws }, f) =>
      draws.map((value, k) => value + responses[f]!(moved[k]!) - responses[f]!(standard[k]!))
    );
    return conforming(question, figures);
  });
}

/** Traits in units of their own spread, about their means, without those that the others fix; null when none varies. */
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
  const standard = Array.from({ length: n }, (_, k) => kept.map(({ z }) => z[k]!));
  const matrix = new Matrix(standard);
  return { standard, covariance: matrix.transpose().mmul(matrix).div(n - 1), errors: kept.map((k) => k.u) };
}

function lowerFactor(matrix: Matrix): Matrix {
  const m = matrix.rows;
  // Rounding can leave a covariance a little unsymmetric, and an eigenvalue of it a little below 0.
  const symmetric = Matrix.add(matrix, matrix.transpose()).mul(0.5);
  const factor = new CholeskyDecomposition(symmetric.add(Matrix.eye(m).mul(1e-12)));
  return factor.lowerTriangularMatrix;
}

/** Quadratic response of a figure to standardised traits, from the draws in which it exists. */
function response(
  standard: readonly (readonly number[])[],
  figure: Float64Array,
): (row: readonly number[]) => number {
  const kept = standard.map((_, k) => k).filter((k) => Number.isFinite(figure[k]!));
  const terms = (row: readonly number[]) => [...row, ...row.map((x) => x * x)];
  const width = 2 * (standard[0]?.length ?? 0);
  if (kept.length < 3 * (width + 1)) return () => 0;
  const design = new Matrix(kept.map((k) => [1, ...terms(standard[k]!)]));
  const answer = solve(design, Matrix.columnVector(kept.map((k) => figure[k]!)), true).to1DArray();
  return (row) => terms(row).reduce((sum, t, i) => sum + t * answer[i + 1]!, 0);
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
