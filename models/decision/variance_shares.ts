// Pure: no I/O, no clock, no hidden randomness.
import { Matrix, solve } from "ml-matrix";
import { mean, quantileOfSorted, standardDeviation } from "../../shared/statistics.ts";

/** Draws of one trait; index k belongs to draw k. A trait used twice under one key is given once. */
export interface TraitDraws {
  readonly trait: string;
  readonly draws: Float64Array;
}

export interface TraitShare {
  readonly trait: string;
  /** Share of the figure's variance that knowing this trait alone would take away (first-order index), 0…1. */
  readonly share: number;
  /** Average slope of the figure with the trait, the others held: figure's unit per trait's unit; null if not resolved. */
  readonly slope: number | null;
}

/** Where a figure's variance comes from. */
export interface VarianceShares {
  /** Draws in which the figure exists. */
  readonly used: number;
  readonly u: number;
  /** In the order given. */
  readonly traits: readonly TraitShare[];
  /** 1 − Σ share: traits acting together, or chance that is no trait. Below 0 by chance, or with correlated traits. */
  readonly rest: number;
  /** An unrelated trait reaches a share of about this by chance. */
  readonly resolution: number;
  /** Standard uncertainty by linear propagation from the slopes (JCGM 100:2008, 5); null with too few draws. */
  readonly linearU: number | null;
}

/** Pieces of the broken line need this many draws each. */
const DRAWS_PER_PIECE = 20;
const MOST_PIECES = 12;
/** Slopes of m traits together need this many draws each. */
const DRAWS_PER_SLOPE = 3;

/**
 * First-order shares of a figure's variance: Var(E[figure | trait])/Var(figure) (I. M. Sobol', Math. Comput. Simul. 55, 271
 * (2001); from memory). The conditional mean is a broken line through the draws, with as many pieces as they allow; its
 * degrees of freedom are taken off (adjusted coefficient of determination). Traits are taken to be drawn independently. Draws without a value are left out.
 * @returns null when the figure has fewer than 3 values or does not vary
 */
export function varianceShares(traits: readonly TraitDraws[], figure: Float64Array): VarianceShares | null {
  for (const { trait, draws } of traits) {
    if (draws.length !== figure.length) {
      throw new RangeError(
        `Cannot share variance: ${draws.length} draws of ${trait}, ${figure.length} of the figure`,
      );
    }
  }
  const kept: number[] = [];
  figure.forEach((y, k) => {
    if (Number.isFinite(y)) kept.push(k);
  });
  const y = kept.map((k) => figure[k]!);
  if (y.length < 3 || !(standardDeviation(y) > 1e-12 * Math.abs(mean(y)))) return null;
  const columns = traits.map(({ draws }) => kept.map((k) => draws[k]!));
  const u = standardDeviation(y);
  const pieces = piecesFor(y.length);
  const linear = slopesTogether(columns, y);
  const shares = columns.map((x, i) =>
    Math.min(1, conditionalVariance(x, withoutOthers(columns, y, linear, i), pieces) / u ** 2)
  );
  return {
    used: y.length,
    u,
    traits: traits.map(({ trait }, i) => ({ trait, share: shares[i]!, slope: linear?.slopes[i] ?? null })),
    rest: 1 - shares.reduce((sum, s) => sum + s, 0),
    resolution: Math.sqrt(2 * pieces) / y.length,
    linearU: linear?.u ?? null,
  };
}

const piecesFor = (n: number): number => Math.max(1, Math.min(MOST_PIECES, Math.floor(n / DRAWS_PER_PIECE)));

/**
 * The figure with the straight-line effect of all other traits taken off: independent draws are correlated a little by
 * chance, and what another trait does must not be booked twice.
 */
function withoutOthers(
  columns: readonly (readonly number[])[],
  y: readonly number[],
  linear: { readonly slopes: readonly (number | null)[] } | null,
  own: number,
): readonly number[] {
  if (linear === null) return y;
  const means = columns.map((x) => mean(x));
  return y.map((v, k) =>
    columns.reduce((rest, x, i) => i === own ? rest : rest - (linear.slopes[i] ?? 0) * (x[k]! - means[i]!), v)
  );
}

/** Variance of the conditional mean of y given x, never below 0. */
function conditionalVariance(x: readonly number[], y: readonly number[], pieces: number): number {
  const sorted = Float64Array.from(x).sort();
  const knots = Array.from({ length: pieces + 1 }, (_, i) => quantileOfSorted(sorted, i / pieces))
    .filter((k, i, all) => i === 0 || k > all[i - 1]!);
  const freedom = y.length - knots.length;
  if (knots.length < 2 || freedom < 1) return 0;
  const fitted = brokenLine(x, y, knots);
  const residual = y.reduce((sum, v, k) => sum + (v - fitted[k]!) ** 2, 0);
  return Math.max(0, standardDeviation(y) ** 2 - residual / freedom);
}

/** Least-squares broken line with corners at the knots, at every x. */
function brokenLine(x: readonly number[], y: readonly number[], knots: readonly number[]): number[] {
  const n = knots.length;
  const normal = Matrix.zeros(n, n);
  const right = Matrix.zeros(n, 1);
  const centre = mean(y);
  const places = x.map((v) => {
    let i = 0;
    while (i < n - 2 && v > knots[i + 1]!) i++;
    return { i, t: (v - knots[i]!) / (knots[i + 1]! - knots[i]!) };
  });
  places.forEach(({ i, t }, k) => {
    const parts: [number, number][] = [[i, 1 - t], [i + 1, t]];
    for (const [a, wa] of parts) {
      right.set(a, 0, right.get(a, 0) + wa * (y[k]! - centre));
      for (const [b, wb] of parts) normal.set(a, b, normal.get(a, b) + wa * wb);
    }
  });
  const heights = solve(normal, right, true).to1DArray();
  return places.map(({ i, t }) => centre + (1 - t) * heights[i]! + t * heights[i + 1]!);
}

/** Slopes with all traits together, and what they make of the traits' variances and correlations. */
function slopesTogether(columns: readonly (readonly number[])[], y: readonly number[]) {
  const sds = columns.map((x) => standardDeviation(x));
  // A trait without spread has no slope in these draws.
  const open = columns.map((_, i) => i).filter((i) => sds[i]! > 0);
  if (y.length < DRAWS_PER_SLOPE * (open.length + 1)) return null;
  const slopes: (number | null)[] = columns.map(() => null);
  if (open.length === 0) return { slopes, u: 0 };
  const means = columns.map((x) => mean(x));
  const centre = mean(y);
  const z = new Matrix(y.map((_, k) => open.map((i) => (columns[i]![k]! - means[i]!) / sds[i]!)));
  const answer = solve(z, Matrix.columnVector(y.map((v) => v - centre)), true).to1DArray();
  open.forEach((i, a) => slopes[i] = answer[a]! / sds[i]!);
  const correlation = z.transpose().mmul(z).div(y.length - 1);
  let variance = 0;
  answer.forEach((a, i) => answer.forEach((b, j) => variance += a * b * correlation.get(i, j)));
  return { slopes, u: Math.sqrt(Math.max(0, variance)) };
}
