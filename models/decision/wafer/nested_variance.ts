// Pure: no I/O, no clock, no hidden randomness.
import { mean } from "../../../shared/statistics.ts";
import { checkShare, fQuantile, fTail } from "../tails.ts";
import type { NoAnswer } from "./site_fit.ts";

/** A value with the groups it lies in, largest first: `["K07-1", "K07-1/05"]` for wafer and die. */
export interface NestedValue {
  readonly value: number;
  readonly groups: readonly string[];
}

export interface VarianceLevel {
  /** More than one: every group of the first holds a single one of the next, and their variances can't be told apart. */
  readonly names: readonly string[];
  readonly groups: number;
  readonly df: number;
  readonly sumOfSquares: number;
  /** Estimate as it comes out; a negative one means that none can be seen. */
  readonly estimate: number;
  /** The estimate, not below 0, and its share of the total, 0…1. */
  readonly variance: number;
  readonly share: number;
  /**
   * Test that there is none: mean square over what it would be, and p; null for the innermost level, or where the
   * mean squares below contradict each other (unequal groups only).
   */
  readonly test:
    | { readonly f: number; readonly df1: number; readonly df2: number; readonly p: number }
    | null;
}

export interface NestedVariance {
  readonly used: number;
  readonly seen: number;
  /** Largest groups first; the last is what is left within the smallest groups. */
  readonly levels: readonly VarianceLevel[];
  /** Levels with a single group: their variance can't be seen. */
  readonly unseen: readonly string[];
  /** Known variance of the readings, taken off the innermost level, and its share; null if none was given. */
  readonly reading: { readonly variance: number; readonly share: number } | null;
  readonly total: number;
  readonly mean: number;
  /** Standard error of the mean under the estimated variances. */
  readonly standardError: number;
}

/**
 * How much of the variance lies between wafers, between the dies of a wafer, between the guides of a die: nested
 * analysis of variance, the mean squares equated to their expectations for groups of any size (C. R. Henderson,
 * Biometrics 9, 226 (1953), method 1). For equal groups and positive estimates this is also the REML solution; for
 * unequal ones it is unbiased, not of least variance. The F tests are exact for equal groups; else the denominator is
 * put together from the mean squares below with the degrees of freedom of F. E. Satterthwaite, Biometrics Bull. 2,
 * 110 (1946). NaN values are left out.
 * @param names of the levels, one more than the groups of a value: `["wafer", "die", "guide"]`
 * @param readingVariance known variance of a single reading (unit²): the part of the innermost level that is no property of the guide
 * @throws RangeError if groups and names don't fit, a value is infinite, or the reading variance is not ≥ 0
 */
export function nestedVariance(
  values: readonly NestedValue[],
  names: readonly string[],
  readingVariance?: number,
): NestedVariance | NoAnswer {
  const depth = names.length - 1;
  for (const v of values) {
    if (v.groups.length !== depth || Math.abs(v.value) === Infinity) {
      throw new RangeError(
        `Cannot share the variance of ${v.value} in ${v.groups.length} groups: need a finite value and ${depth} groups`,
      );
    }
  }
  if (readingVariance !== undefined && !(readingVariance >= 0)) {
    throw new RangeError(`Cannot take off a reading variance of ${readingVariance}: need >= 0`);
  }
  const used = values.filter((v) => !Number.isNaN(v.value));
  if (used.length < 2) return { refused: `variance needs at least 2 values, found ${used.length}` };
  const { partitions, levels, unseen } = distinctPartitions(used, names);
  const squares = nestedSquares(used, partitions);
  const coefficients = expectedSquares(partitions, used.length);
  const estimates: number[] = [];
  const count = levels.length;
  for (let l = count - 1; l >= 0; l--) {
    let known = 0;
    for (let j = l + 1; j < count; j++) known += coefficients[l]![j]! * estimates[j]!;
    estimates[l] = (squares[l]!.ss - known) / coefficients[l]![l]!;
  }
  const reading = readingVariance ?? 0;
  const raw = estimates.map((e, l) => l === count - 1 ? e - reading : e);
  const variances = raw.map((e) => Math.max(0, e));
  const total = variances.reduce((s, v) => s + v, 0) + reading;
  const share = (v: number) => total > 0 ? v / total : NaN;
  // Var(mean) = Σ σ²·Σ n_g²/N² over the groups of each level.
  const meanVariance = partitions.slice(1).reduce((sum, groups, l) => {
    const v = variances[l]! + (l === count - 1 ? reading : 0);
    return sum + v * [...groups.values()].reduce((s, g) => s + (g.length / used.length) ** 2, 0);
  }, 0);
  return {
    used: used.length,
    seen: values.length,
    levels: levels.map((level, l) => ({
      names: level,
      groups: partitions[l + 1]!.size,
      df: squares[l]!.df,
      sumOfSquares: squares[l]!.ss,
      estimate: raw[l]!,
      variance: variances[l]!,
      share: share(variances[l]!),
      test: levelTest(l, squares, coefficients),
    })),
    unseen,
    reading: readingVariance === undefined ? null : { variance: reading, share: share(reading) },
    total,
    mean: mean(used.map((v) => v.value)),
    standardError: Math.sqrt(meanVariance),
  };
}

/** Members (positions) of each group, by the path of the group. */
type Partition = ReadonlyMap<string, readonly number[]>;

/**
 * The whole, the groups of each level, and single values; levels with the very same groups as the next are joined to
 * it.
 */
function distinctPartitions(used: readonly NestedValue[], names: readonly string[]) {
  const partitionOf = (path: (v: NestedValue, i: number) => string): Partition => {
    const groups = new Map<string, number[]>();
    for (const [i, v] of used.entries()) {
      const key = path(v, i);
      const group = groups.get(key);
      if (group === undefined) groups.set(key, [i]);
      else group.push(i);
    }
    return groups;
  };
  const partitions: Partition[] = [partitionOf(() => "")];
  const levels: string[][] = [];
  const unseen: string[] = [];
  let joined: string[] = [];
  for (const [l, name] of names.entries()) {
    const last = l === names.length - 1;
    const here = last
      ? partitionOf((_, i) => `${i}`)
      : partitionOf((v) => JSON.stringify(v.groups.slice(0, l + 1)));
    joined.push(name);
    const finer = last
      ? Infinity
      : l === names.length - 2
      ? used.length
      : partitionOf((v) => JSON.stringify(v.groups.slice(0, l + 2))).size;
    if (finer === here.size) continue;
    // What a single group adds is in the mean.
    if (here.size === 1) {
      unseen.push(...joined);
      joined = [];
      continue;
    }
    partitions.push(here);
    levels.push(joined);
    joined = [];
  }
  return { partitions, levels, unseen };
}

interface Squares {
  readonly ss: number;
  readonly df: number;
}

/** Sum of squares between the groups of each level inside those of the level above, from means and not from sums. */
function nestedSquares(used: readonly NestedValue[], partitions: readonly Partition[]): Squares[] {
  const offset = used[0]!.value;
  const means = partitions.map((groups) => {
    const ofValue = new Float64Array(used.length);
    for (const members of groups.values()) {
      const m = mean(members.map((i) => used[i]!.value - offset));
      for (const i of members) ofValue[i] = m;
    }
    return ofValue;
  });
  return partitions.slice(1).map((groups, l) => {
    let ss = 0;
    for (let i = 0; i < used.length; i++) ss += (means[l + 1]![i]! - means[l]![i]!) ** 2;
    return { ss, df: groups.size - partitions[l]!.size };
  });
}

/** coefficients[l][j]: share of the variance of level j in the expected sum of squares of level l. */
function expectedSquares(partitions: readonly Partition[], n: number): number[][] {
  const count = partitions.length - 1;
  const groupOf = partitions.map((groups) => {
    const sizes = new Float64Array(n);
    for (const members of groups.values()) for (const i of members) sizes[i] = members.length;
    return sizes;
  });
  // E[Σ T_g²/n_g] of level l holds σ_j²·Σ_g Σ_(h in g) n_h²/n_g: summed over values, n_h/n_g each.
  const held = (l: number, j: number) => {
    let sum = 0;
    for (let i = 0; i < n; i++) sum += Math.min(1, groupOf[j]![i]! / groupOf[l]![i]!);
    return sum;
  };
  return Array.from(
    { length: count },
    (_, l) => Array.from({ length: count }, (_, j) => j < l ? 0 : held(l + 1, j + 1) - held(l, j + 1)),
  );
}

function levelTest(l: number, squares: readonly Squares[], coefficients: readonly (readonly number[])[]) {
  const count = squares.length;
  if (l === count - 1) return null;
  const ms = (j: number) => squares[j]!.ss / squares[j]!.df;
  const per = (j: number, m: number) => coefficients[j]![m]! / squares[j]!.df;
  // Shares of the mean squares below that add up to what this one expects without variance of its own.
  const shares: number[] = [];
  for (let m = l + 1; m < count; m++) {
    let already = 0;
    for (let j = l + 1; j < m; j++) already += shares[j]! * per(j, m);
    shares[m] = (per(l, m) - already) / per(m, m);
  }
  let [denominator, spread] = [0, 0];
  for (let j = l + 1; j < count; j++) {
    // Shares of 1e-17 from rounding would count degrees of freedom that aren't there.
    if (Math.abs(shares[j]!) < 1e-12) continue;
    const part = shares[j]! * ms(j);
    denominator += part;
    spread += part * part / squares[j]!.df;
  }
  if (!(denominator > 0)) return null;
  const f = ms(l) / denominator;
  const df2 = denominator * denominator / spread;
  return { f, df1: squares[l]!.df, df2, p: fTail(f, squares[l]!.df, df2) };
}

/**
 * Exact interval of the share that lies between groups of equal size, from the F ratio of a one-way analysis (R. A.
 * Fisher; S. R. Searle, Linear Models (1971), chapter 9): (F/F_q − 1)/(F/F_q − 1 + n). Ends are not below 0.
 * @param size values in each group
 */
export function betweenShareInterval(
  test: { readonly f: number; readonly df1: number; readonly df2: number },
  size: number,
  confidence = 0.95,
): { lo: number; hi: number } {
  checkShare(confidence, "confidence");
  const at = (p: number) => {
    const ratio = test.f / fQuantile(p, test.df1, test.df2) - 1;
    return Math.max(0, ratio / (ratio + size));
  };
  return { lo: at((1 + confidence) / 2), hi: at((1 - confidence) / 2) };
}
