// Pure: no I/O, no clock, no hidden randomness.
import { tTwoSided } from "../tails.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import {
  allEqual,
  compareFits,
  fitTerms,
  type NoAnswer,
  outermost,
  type SiteValue,
  type Term,
  type TermTest,
  usableSites,
} from "./site_fit.ts";

export interface WaferTrend {
  /** Sites with a value, of all. */
  readonly used: number;
  readonly seen: number;
  /** Slope along x and y given the radial term. */
  readonly linear: TermTest | NoAnswer;
  /** Bow x² + y² given the slope. */
  readonly radial: TermTest | NoAnswer;
  /** Slope and bow together. */
  readonly any: TermTest | NoAnswer;
  /** value = constant + slopeX·x + slopeY·y + bow·(x² + y²), per m and m²; null if the places don't determine it. */
  readonly surface: TrendSurface | null;
  /** Share of the (weighted) variance that slope and bow take up, 0…1; NaN for equal values. */
  readonly explained: number;
}

export interface TrendSurface {
  readonly constant: number;
  readonly slopeX: number;
  readonly slopeY: number;
  readonly bow: number;
  /** Standard uncertainties from the scatter about the surface. */
  readonly u: {
    readonly constant: number;
    readonly slopeX: number;
    readonly slopeY: number;
    readonly bow: number;
  };
  /** From side to side along the slope, and from the centre to the outermost die, in the unit of the value. */
  readonly acrossWafer: number;
  readonly centreToEdge: number;
  /** Scatter about the surface (of weight 1). */
  readonly residual: number;
}

/** Terms of the trend, scaled by the outermost radius so that they are of order 1. */
export function trendTerms(radius: number): { constant: Term; x: Term; y: Term; bow: Term } {
  return {
    constant: () => 1,
    x: (s) => s.x / radius,
    y: (s) => s.y / radius,
    bow: (s) => (s.x * s.x + s.y * s.y) / (radius * radius),
  };
}

/**
 * Linear and radial trend of a trait over the dies of a wafer: weighted least squares on 1, x, y, x² + y², with F
 * tests of each given the other (exact for independent normal scatter of variance ∝ 1/weight). Dies that resemble
 * their neighbours beyond the trend make the tests too willing: see `neighbourSimilarity()`.
 * @throws RangeError for places, values or weights that are no numbers
 */
export function waferTrend(sites: readonly SiteValue[]): WaferTrend {
  const used = usableSites(sites);
  const counts = { used: used.length, seen: sites.length };
  const refuse = (refused: string): WaferTrend => ({
    ...counts,
    linear: { refused },
    radial: { refused },
    any: { refused },
    surface: null,
    explained: NaN,
  });
  if (used.length < 2) return refuse(`a trend needs at least 2 dies, found ${used.length}`);
  if (allEqual(used)) return refuse("the values do not differ");
  const radius = outermost(used);
  if (radius === 0) return refuse("all dies stand at the centre");
  const t = trendTerms(radius);
  const full = fitTerms(used, [t.constant, t.x, t.y, t.bow]);
  const flat = fitTerms(used, [t.constant]);
  return {
    ...counts,
    linear: compareFits(full, fitTerms(used, [t.constant, t.bow]), used, "a slope"),
    radial: compareFits(full, fitTerms(used, [t.constant, t.x, t.y]), used, "a radial trend"),
    any: compareFits(full, flat, used, "a trend"),
    surface: surfaceOf(full, used.length, radius),
    explained: Math.min(1, Math.max(0, 1 - full.rss / flat.rss)),
  };
}

function surfaceOf(fit: ReturnType<typeof fitTerms>, n: number, radius: number): TrendSurface | null {
  const { coefficients: c, inverse: v } = fit;
  if (c === null || v === null || n < 6) return null;
  const residual = Math.sqrt(fit.rss / (n - 4));
  const u = (i: number, scale: number) => residual * Math.sqrt(v[i]!) / scale;
  return {
    constant: c[0]!,
    slopeX: c[1]! / radius,
    slopeY: c[2]! / radius,
    bow: c[3]! / radius ** 2,
    u: { constant: u(0, 1), slopeX: u(1, radius), slopeY: u(2, radius), bow: u(3, radius ** 2) },
    acrossWafer: 2 * Math.hypot(c[1]!, c[2]!),
    centreToEdge: c[3]!,
    residual,
  };
}

export interface EdgeEffect {
  readonly outer: number;
  readonly inner: number;
  /** Mean of the outer less mean of the inner dies, with standard uncertainty and test (Welch). */
  readonly difference: number;
  readonly u: number;
  readonly df: number;
  readonly p: number;
  /** Does the step at the edge remain beside slope and bow? */
  readonly beyondTrend: TermTest | NoAnswer;
}

/**
 * Do the dies at the edge differ? Outer dies lie at `edgeFrom` (m from the centre) or beyond. The means are compared
 * without assuming equal scatter (B. L. Welch, Biometrika 34, 28 (1947)); weights are not used there. A bow alone
 * makes such a difference too, so the step is also tested beside it.
 * @throws RangeError for places, values or weights that are no numbers, or a radius that is not > 0
 */
export function edgeEffect(sites: readonly SiteValue[], edgeFrom: number): EdgeEffect | NoAnswer {
  if (!(edgeFrom > 0)) throw new RangeError(`Cannot part the edge at ${edgeFrom} m: need a radius > 0`);
  const used = usableSites(sites);
  const isOuter = (s: SiteValue) => Math.hypot(s.x, s.y) >= edgeFrom * (1 - 1e-12);
  const [outer, inner] = [used.filter(isOuter), used.filter((s) => !isOuter(s))];
  if (outer.length < 2 || inner.length < 2) {
    return {
      refused:
        `the edge needs at least 2 dies on either side, found ${outer.length} outer and ${inner.length} inner`,
    };
  }
  if (allEqual(used)) return { refused: "the values do not differ" };
  const part = (group: readonly SiteValue[]) => {
    const values = group.map((s) => s.value);
    // Equal values have no scatter; their mean is off by rounding, and the standard deviation with it.
    const s = allEqual(group) ? 0 : standardDeviation(values);
    return { mean: mean(values), v: s * s / values.length, df: values.length - 1 };
  };
  const [o, i] = [part(outer), part(inner)];
  const variance = o.v + i.v;
  const difference = o.mean - i.mean;
  const df = variance > 0 ? variance ** 2 / (o.v ** 2 / o.df + i.v ** 2 / i.df) : Math.min(o.df, i.df);
  const t = trendTerms(outermost(used));
  const trend = [t.constant, t.x, t.y, t.bow];
  const step: Term = (s) => isOuter(s) ? 1 : 0;
  return {
    outer: outer.length,
    inner: inner.length,
    difference,
    u: Math.sqrt(variance),
    df,
    p: variance > 0 ? tTwoSided(difference / Math.sqrt(variance), df) : 0,
    beyondTrend: compareFits(
      fitTerms(used, [...trend, step]),
      fitTerms(used, trend),
      used,
      "a step at the edge beside a trend",
    ),
  };
}
