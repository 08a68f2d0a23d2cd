// Pure: no I/O, no clock, no hidden randomness.
import { standardDeviation } from "../../shared/statistics.ts";
import type { Basis, Uncertain } from "../../shared/vocabulary.ts";
import { type Contradiction, contradictions } from "./contradictions.ts";
import type { Place } from "./design.ts";
import { type Leaf, leavesOf, type Level, LEVELS, type LotObservation } from "./forest.ts";
import { type InformationShares, informationShares } from "./information.ts";
import { type Estimate, inherit, type Pool, type Spread, type Unit } from "./inherit.ts";
import { type Asked, fitLots, joined, type LotFit } from "./lot_fit.ts";
import { PLATFORM_DEGREES, poolPriors } from "./pool_priors.ts";
import { STRONG_EVIDENCE, type TrendChoice, trendChooser } from "./trend.ts";
import { type Truncated, truncated } from "./truncated.ts";

export interface PooledEstimate extends Estimate {
  /** Where the value comes from; null for a platform default with no reading of any lot. */
  readonly shares: InformationShares | null;
  /**
   * The same with the trait's natural bounds applied, for showing; null without bounds. `value` and `u` are those of the
   * normal before it is cut: whoever draws from it cuts once.
   */
  readonly bounded: Truncated | null;
}

export interface HierarchicalPool extends Pool {
  estimate(guide: Required<Omit<Unit, "widthUm">> & { readonly widthUm?: number }): PooledEstimate;
  /** Standard deviations of the effects by level, with their own uncertainty; null without a fit. */
  readonly spreads: Readonly<Record<Level, Uncertain>> | null;
  /** Mean, differences between widths and slopes of the trend; empty without a fit. */
  readonly effects: LotFit["effects"];
  readonly trend: Pick<TrendChoice, "taken" | "trials">;
  /** What the lot's guides have on the whole; null without a fit. */
  usual(): Uncertain | null;
  /** Readings of this lot that contradict their neighbours; they are in the estimates all the same. */
  contradictions(): readonly Contradiction[];
}

export interface PoolOptions {
  /** Natural bounds of the true value. */
  readonly bounds?: { readonly low?: number; readonly high?: number };
  /** Weight of the platform's spreads, degrees of freedom. */
  readonly degrees?: number;
  /** Bayes factor from which a trend over the wafer is taken; Infinity: never. */
  readonly trendFrom?: number;
  /** Probability of naming any reading when all are good. */
  readonly alpha?: number;
}

/** Among the good readings of 100 traits one is named by chance. */
export const CONTRADICTION_ALPHA = 0.01;

/**
 * Estimates of one trait for every guide, lot by lot, from the readings of all lots: posterior of the hierarchical model of
 * {@link fitLots}. A guide, die or wafer that nobody read gets the wider uncertainty that its place in the nesting gives it.
 *
 * A lot without readings keeps at least the platform's own uncertainty: other lots speak for the process, not for it.
 *
 * @param observations readings of all lots; `die` and `guide` are full ids
 * @param places centres of the dies of all lots from their wafers' centres, by full id; a die that was read and has no
 * place rules a trend out
 * @param spread prior standard deviations of the effects; all 0: nobody states them
 * @param fallback the platform's default; null when it has none
 * @returns the pool of a lot; lots share the work
 */
export function pools(
  observations: readonly LotObservation[],
  places: ReadonlyMap<string, Place>,
  spread: Spread,
  fallback: (Uncertain & { readonly from: string }) | null,
  options: PoolOptions = {},
): (lot: string) => HierarchicalPool {
  check(observations);
  const { degrees = PLATFORM_DEGREES, trendFrom = STRONG_EVIDENCE, alpha = CONTRADICTION_ALPHA } = options;
  const scale = Math.max(
    Math.hypot(spread.lotSd, spread.waferSd, spread.dieSd, spread.guideSd),
    observations.length > 1 ? standardDeviation(observations.map((o) => o.value)) : 0,
    fallback?.u ?? 0,
  );
  const leaves = leavesOf(observations, scale);
  const priors = leaves.length === 0 ? null : poolPriors(leaves, spread, fallback, degrees);
  if (priors === null) return (lot) => withoutModel(observations, spread, fallback, lot, options);
  const trendOf = trendChooser({ leaves, ...priors, places }, priors.spread, trendFrom);
  const lots = new Set(leaves.map((l) => l.lot));
  const fits = new Map<string, (lot: string) => LotFit>();
  const fitOf = (lot: string, { taken, design }: TrendChoice): LotFit => {
    // Lots that nobody read are all alike.
    const asked = lots.has(lot) ? lot : UNREAD;
    const key = taken?.lots === "own" ? lot : "";
    let fit = fits.get(key);
    if (fit === undefined) {
      fit = fitLots(leaves, design, priors.spread, key === "" ? [...lots, UNREAD] : [lot]);
      fits.set(key, fit);
    }
    return fit(asked);
  };
  const make = (lot: string): HierarchicalPool => {
    const trend = trendOf(lot);
    const fit = fitOf(lot, trend);
    const refit = (without: ReadonlySet<number>): LotFit | null => {
      const rest = leavesOf(observations, scale, without);
      if (rest.length === 0) return null;
      return fitLots(rest, trend.design, priors.spread, [lot], fit.mode.at)(lot);
    };
    let named: readonly Contradiction[] | null = null;
    return {
      estimate: estimator(fit, leaves, observations, lot, fallback, 1 / priors.mean.u ** 2, options),
      spreads: spreadsOf(fit),
      usual: () => joined(fit.ask({ lot, wafer: UNREAD })),
      effects: fit.effects,
      trend: { taken: trend.taken, trials: trend.trials },
      contradictions: () => named ??= contradictions(observations, lot, fit, refit, alpha),
    };
  };
  const made = new Map<string, HierarchicalPool>();
  return (lot) => {
    const held = made.get(lot) ?? make(lot);
    made.set(lot, held);
    return held;
  };
}

/** A name that no lot and no wafer has. */
const UNREAD = "";

/** {@link pools} for one lot. */
export const pooled = (
  observations: readonly LotObservation[],
  places: ReadonlyMap<string, Place>,
  spread: Spread,
  fallback: (Uncertain & { readonly from: string }) | null,
  lot: string,
  options: PoolOptions = {},
): HierarchicalPool => pools(observations, places, spread, fallback, options)(lot);

function estimator(
  fit: LotFit,
  leaves: readonly Leaf[],
  observations: readonly LotObservation[],
  lot: string,
  fallback: (Uncertain & { readonly from: string }) | null,
  priorPrecision: number,
  { bounds }: PoolOptions,
): HierarchicalPool["estimate"] {
  const evidence = evidenceOf(leaves, observations, lot);
  const unread = !leaves.some((l) => l.lot === lot);
  const cache = new Map<string, PooledEstimate>();
  return ({ wafer, die, guide, widthUm }) => {
    // Guides of one die and width that nobody read are all alike.
    const key = evidence.isRead(guide) ? guide : `${die}|${widthUm}`;
    const held = cache.get(key);
    if (held !== undefined) return held;
    const asked = { lot, wafer, die, guide, ...(widthUm === undefined ? {} : { widthUm }) };
    const { value, u } = joined(fit.ask(asked));
    const wide = unread ? Math.max(u, fallback?.u ?? 0) : u;
    const { sweep, variances, forest } = fit;
    const made = {
      value,
      u: wide,
      ...evidence(asked, fallback?.from ?? "other lots"),
      shares: informationShares(forest, sweep, variances, priorPrecision, asked),
      bounded: bounds === undefined ? null : truncated({ value, u: wide }, bounds),
    };
    cache.set(key, made);
    return made;
  };
}

function check(observations: readonly LotObservation[]): void {
  for (const { value, u, index, die, guide } of observations) {
    if (!Number.isFinite(value) || !(u >= 0 && u < Infinity)) {
      throw new RangeError(`Cannot pool reading ${index}: found ${value} ± ${u}, need finite numbers, u ≥ 0`);
    }
    if (guide !== undefined && die === undefined) {
      throw new RangeError(`Cannot pool reading ${index} of guide ${guide}: its die is not named`);
    }
  }
}

/** Means and standard deviations of the spreads over the integration. */
function spreadsOf(fit: LotFit): Record<Level, Uncertain> {
  const share = Float64Array.from(fit.points, (p) => p.share);
  const of = (level: number) => {
    const mean = Float64Array.from(fit.points, (p) => Math.sqrt(p.variances[level]!));
    return joined({ share, mean, variance: new Float64Array(share.length) });
  };
  return Object.fromEntries(LEVELS.map((name, i) => [name, of(i)])) as Record<Level, Uncertain>;
}

/** The readings that an estimate rests on first: those of the nearest unit that has any, of the guide's width if it has such. */
function evidenceOf(leaves: readonly Leaf[], observations: readonly LotObservation[], lot: string) {
  const own = leaves.filter((l) => l.lot === lot);
  const by = (key: (l: Leaf) => string | undefined) => Map.groupBy(own, key);
  const [guides, dies, wafers] = [by((l) => l.guide), by((l) => l.die), by((l) => l.wafer)];
  const isRead = (guide: string) => guides.has(guide);
  const lists = new Map<string, { readonly used: readonly number[]; readonly otherWidth: boolean }>();
  const listOf = (found: readonly Leaf[], basis: Basis, widthUm: number | undefined) => {
    const same = found.filter((l) =>
      basis === "measured" || l.widthUm === undefined || widthUm === undefined || l.widthUm === widthUm
    );
    const used = (same.length > 0 ? same : found).flatMap((l) =>
      l.members.map((k) => observations[k]!.index)
    );
    return { used, otherWidth: same.length === 0 };
  };
  const find = (asked: Asked & { readonly die: string; readonly guide: string }, platform: string) => {
    const tiers: [Basis, string, readonly Leaf[] | undefined][] = [
      ["measured", asked.guide, guides.get(asked.guide)],
      ["die", asked.die, dies.get(asked.die)],
      ["wafer", asked.wafer, wafers.get(asked.wafer)],
      ["lot", lot, own],
    ];
    for (const [basis, from, found] of tiers) {
      if (found === undefined || found.length === 0) continue;
      // Thousands of guides may rest on one list of thousands: made once.
      const key = `${basis}|${from}|${asked.widthUm}`;
      let held = lists.get(key);
      if (held === undefined) lists.set(key, held = listOf(found, basis, asked.widthUm));
      return { basis, from, ...held };
    }
    return { basis: "platform" as const, from: platform, used: [], otherWidth: false };
  };
  return Object.assign(find, { isRead });
}

/** Without a model only what was read itself is known, and the platform's default. */
function withoutModel(
  observations: readonly LotObservation[],
  spread: Spread,
  fallback: (Uncertain & { readonly from: string }) | null,
  lot: string,
  { bounds }: PoolOptions,
): HierarchicalPool {
  const own = observations.filter((o) => o.lot === lot && o.guide !== undefined);
  const read = inherit(own, spread, fallback, lot);
  const measured = new Set(own.map((o) => o.guide));
  const unread = inherit([], spread, fallback, lot);
  return {
    estimate(guide) {
      const found = (measured.has(guide.guide) ? read : unread).estimate(guide);
      return { ...found, shares: null, bounded: bounds === undefined ? null : truncated(found, bounds) };
    },
    spreads: null,
    usual: () => null,
    effects: [],
    trend: { taken: null, trials: [] },
    contradictions: () => [],
  };
}
