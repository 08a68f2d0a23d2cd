// Pure: no I/O, no clock, no hidden randomness.
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";

/** Factors of control charts for groups of `n` normal values, in the usual letters (ISO 7870-2, annex). */
export interface ChartConstants {
  readonly n: number;
  /** Mean of the range, in standard deviations. */
  readonly d2: number;
  /** Standard deviation of the range, in standard deviations. */
  readonly d3: number;
  /** Mean of the sample standard deviation, in standard deviations. */
  readonly c4: number;
  /** 3/(d2·√n) and 3/(c4·√n): limits of means from the mean range or the mean standard deviation. */
  readonly A2: number;
  readonly A3: number;
  /** 1 ∓ 3·d3/d2, not below 0: limits of ranges. */
  readonly D3: number;
  readonly D4: number;
  /** 1 ∓ 3·√(1 − c4²)/c4, not below 0: limits of standard deviations. */
  readonly B3: number;
  readonly B4: number;
}

/** Largest group for which the range is used; the sample range wastes nearly all the information long before. */
export const LARGEST_RANGE_GROUP = 100;
const known = new Map<number, ChartConstants>();

/**
 * Chart constants of groups of `n` values, computed from their definitions (accuracy 1e-12).
 * @throws RangeError unless `n` is an integer in 2…100
 */
export function chartConstants(n: number): ChartConstants {
  if (!Number.isSafeInteger(n) || n < 2 || n > LARGEST_RANGE_GROUP) {
    throw new RangeError(
      `Cannot give chart constants for groups of ${n}: need an integer in 2…${LARGEST_RANGE_GROUP}`,
    );
  }
  const held = known.get(n);
  if (held !== undefined) return held;
  const { mean: d2, meanSquare } = rangeMoments(n);
  const d3 = Math.sqrt(meanSquare - d2 * d2);
  const c4 = meanOfStandardDeviation(n);
  const ranges = 3 * d3 / d2;
  const spreads = 3 * relativeSpreadOfDeviation(n);
  const constants: ChartConstants = {
    n,
    d2,
    d3,
    c4,
    A2: 3 / (d2 * Math.sqrt(n)),
    A3: 3 / (c4 * Math.sqrt(n)),
    D3: Math.max(0, 1 - ranges),
    D4: 1 + ranges,
    B3: Math.max(0, 1 - spreads),
    B4: 1 + spreads,
  };
  known.set(n, constants);
  return constants;
}

/**
 * c4: E[s]/σ = √(2/(n−1))·Γ(n/2)/Γ((n−1)/2). The ratio of gamma functions follows from
 * r(m) = Γ((m+1)/2)/Γ(m/2), r(1) = 1/√π, r(m+1) = (m/2)/r(m): no gamma function is needed.
 * @throws RangeError unless `n` is an integer ≥ 2
 */
export function meanOfStandardDeviation(n: number): number {
  if (!Number.isSafeInteger(n) || n < 2) {
    throw new RangeError(`Cannot give c4 for ${n} values: need an integer >= 2`);
  }
  // Beyond this the series in k = 1/(n−1) is exact to rounding: its next term is 0.01·k⁴.
  if (n > 2000) {
    const k = 1 / (n - 1);
    return 1 - k / 4 + k * k / 32 + 5 * k ** 3 / 128;
  }
  let ratio = 1 / Math.sqrt(Math.PI);
  for (let m = 1; m < n - 1; m++) ratio = m / 2 / ratio;
  return Math.sqrt(2 / (n - 1)) * ratio;
}

/** Standard deviation of s over its mean: √(1 − c4²)/c4. */
export function relativeSpreadOfDeviation(n: number): number {
  const c4 = meanOfStandardDeviation(n);
  return Math.sqrt((1 - c4) * (1 + c4)) / c4;
}

const STEP = 0.05;
const REACH = 9; // Φ(−9) = 1e-19

/**
 * Mean and mean square of the range of n standard normals. With P(R ≤ w) = n·∫φ(x)·[Φ(x+w) − Φ(x)]^(n−1) dx
 * (L. H. C. Tippett, Biometrika 17, 364 (1925)): E[R] = ∫[1 − P]dw over 0…∞ = ∫[1 − Φⁿ − (1−Φ)ⁿ]dx over the line, and
 * E[R²] = ∫2w[1 − P]dw. The trapezoidal rule on an analytic integrand that dies away at both ends converges
 * exponentially; w = exp(t − e^(−t)) makes the half-line such a case.
 */
function rangeMoments(n: number): { mean: number; meanSquare: number } {
  let mean = 0;
  const xs: number[] = [];
  for (let x = -REACH; x <= REACH; x += STEP) xs.push(x);
  for (const x of xs) {
    const below = normalCdf(x, 0, 1);
    const above = normalCdf(-x, 0, 1);
    mean += 1 - below ** n - above ** n;
  }
  let meanSquare = 0;
  for (let t = -3.5; t <= 3.2; t += STEP) {
    const w = Math.exp(t - Math.exp(-t));
    meanSquare += 2 * w * rangeTail(n, w, xs) * w * (1 + Math.exp(-t));
  }
  return { mean: mean * STEP, meanSquare: meanSquare * STEP };
}

/** P(R > w). */
function rangeTail(n: number, w: number, xs: readonly number[]): number {
  let within = 0;
  for (const low of xs) {
    // Taken from the nearer tail: a difference of two numbers near 1 has no digits.
    const gap = low > 0
      ? normalCdf(-low, 0, 1) - normalCdf(-low - w, 0, 1)
      : normalCdf(low + w, 0, 1) - normalCdf(low, 0, 1);
    within += Math.exp(-low * low / 2) * gap ** (n - 1);
  }
  return 1 - n * within * STEP / Math.sqrt(2 * Math.PI);
}
