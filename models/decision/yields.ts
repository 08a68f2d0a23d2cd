// Pure: no I/O, no clock, no hidden randomness.
import betaQuantile from "@stdlib/stats-base-dists-beta-quantile";
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";

/** A share with its confidence limits. */
export interface ShareInterval {
  readonly low: number;
  readonly high: number;
}

/**
 * Exact limits of a binomial share, k good of n: each tail has at most (1 − confidence)/2 (C. J. Clopper & E. S. Pearson,
 * Biometrika 26, 404 (1934)). None of none: 0…1.
 */
export function exactInterval(k: number, n: number, confidence = 0.95): ShareInterval {
  checkCounts(k, n, confidence);
  const tail = (1 - confidence) / 2;
  return {
    low: k === 0 ? 0 : betaQuantile(tail, k, n - k + 1),
    high: k === n ? 1 : betaQuantile(1 - tail, k + 1, n - k),
  };
}

/**
 * Score limits of a binomial share: the shares that a normal test does not reject (E. B. Wilson, J. Am. Stat. Assoc. 22,
 * 209 (1927)). Nearer the nominal confidence than the exact limits, which are never below it. None of none: 0…1.
 */
export function scoreInterval(k: number, n: number, confidence = 0.95): ShareInterval {
  checkCounts(k, n, confidence);
  if (n === 0) return { low: 0, high: 1 };
  const z = normalQuantile((1 + confidence) / 2, 0, 1);
  const share = k / n;
  const centre = share + z * z / (2 * n);
  const half = z * Math.sqrt(share * (1 - share) / n + z * z / (4 * n * n));
  const scale = 1 + z * z / n;
  return {
    low: k === 0 ? 0 : (centre - half) / scale,
    high: k === n ? 1 : (centre + half) / scale,
  };
}

/**
 * How many have to pass without one failure to show a yield of at least `share` with this confidence:
 * ⌈ln(1 − confidence)/ln(share)⌉.
 */
export function zeroFailureSize(share: number, confidence: number): number {
  for (const [name, x] of [["share", share], ["confidence", confidence]] as const) {
    if (!(x > 0 && x < 1)) {
      throw new RangeError(`Cannot size a sample: found ${name} ${x}, need it between 0 and 1`);
    }
  }
  // Where the ratio is a whole number rounding may push it up by one: the last digits are not asked.
  return Math.ceil(Math.log(1 - confidence) / Math.log(share) * (1 - 1e-12));
}

/** A yield expected from probabilities. */
export interface ExpectedYield {
  readonly count: number;
  /** Expected number of good ones. */
  readonly expected: number;
  /** Standard deviation of that number if the units are good or bad independently of each other (Poisson binomial). */
  readonly sd: number;
  /** The most it can be when all units of a group go together: the groups themselves are still independent. */
  readonly sdTogether: number;
}

/**
 * Number of good units expected from their probabilities of conformity. Units that rest on the same readings or defaults
 * are not independent: the truth lies between the two spreads, with everything that shares a doubt in one group.
 * @param groups per unit the group that it shares its doubt with; all in one group if left out
 */
export function expectedYield(probabilities: ArrayLike<number>, groups?: ArrayLike<string>): ExpectedYield {
  const n = probabilities.length;
  if (groups !== undefined && groups.length !== n) {
    throw new RangeError(`Cannot group ${n} probabilities by ${groups.length} names: need as many`);
  }
  let expected = 0;
  let variance = 0;
  const together = new Map<string, number>();
  for (let i = 0; i < n; i++) {
    const p = probabilities[i]!;
    if (!(p >= 0 && p <= 1)) throw new RangeError(`Cannot expect a yield: found probability ${p}, need 0…1`);
    expected += p;
    variance += p * (1 - p);
    const group = groups?.[i] ?? "";
    together.set(group, (together.get(group) ?? 0) + Math.sqrt(p * (1 - p)));
  }
  let most = 0;
  // |correlation| ≤ 1, so the standard deviations within a group add up at most.
  for (const sd of together.values()) most += sd * sd;
  return { count: n, expected, sd: Math.sqrt(variance), sdTogether: Math.sqrt(most) };
}

/** More units than this are summed by the normal approximation. */
const MOST_EXACT = 4000;

/**
 * Central interval for the number of good units among independent ones: exact by convolution of the single outcomes, for
 * more than {@link MOST_EXACT} uncertain units by the normal approximation with continuity correction.
 */
export function yieldRange(
  probabilities: ArrayLike<number>,
  confidence = 0.95,
): { low: number; high: number; exact: boolean } {
  const { count, expected, sd } = expectedYield(probabilities);
  const tail = (1 - confidence) / 2;
  let certain = 0;
  const open: number[] = [];
  for (let i = 0; i < count; i++) {
    if (probabilities[i] === 1) certain++;
    else if (probabilities[i]! > 0) open.push(probabilities[i]!);
  }
  if (open.length > MOST_EXACT) {
    const z = normalQuantile(1 - tail, 0, 1);
    return {
      low: Math.max(certain, Math.ceil(expected - z * sd - 0.5)),
      high: Math.min(certain + open.length, Math.floor(expected + z * sd + 0.5)),
      exact: false,
    };
  }
  const mass = new Float64Array(open.length + 1);
  mass[0] = 1;
  open.forEach((p, done) => {
    for (let k = done + 1; k > 0; k--) mass[k] = mass[k]! * (1 - p) + mass[k - 1]! * p;
    mass[0]! *= 1 - p;
  });
  return { low: certain + quantileOf(mass, tail), high: certain + quantileOf(mass, 1 - tail), exact: true };
}

/** Least k with P(K ≤ k) ≥ q. */
function quantileOf(mass: Float64Array, q: number): number {
  let sum = 0;
  for (let k = 0; k < mass.length; k++) {
    sum += mass[k]!;
    if (sum >= q) return k;
  }
  return mass.length - 1;
}

function checkCounts(k: number, n: number, confidence: number): void {
  if (!(Number.isSafeInteger(k) && Number.isSafeInteger(n) && k >= 0 && n >= k)) {
    throw new RangeError(`Cannot give limits for ${k} of ${n}: need whole numbers, 0 ≤ k ≤ n`);
  }
  if (!(confidence > 0 && confidence < 1)) {
    throw new RangeError(`Cannot give limits with confidence ${confidence}: need it between 0 and 1`);
  }
}
