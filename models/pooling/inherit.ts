// Pure: no I/O, no clock, no hidden randomness.
import { mean, standardDeviation, weightedMean } from "../../shared/statistics.ts";
import type { Basis, Uncertain } from "../../shared/vocabulary.ts";

/** Where a thing sits: guide within die within wafer within lot. Ids are full ids. */
export interface Unit {
  readonly wafer: string;
  /** Missing: the reading belongs to the whole wafer. */
  readonly die?: string;
  /** Missing: the reading belongs to the whole die. */
  readonly guide?: string;
  /** Design width: guides of one width are preferred as neighbours of each other. */
  readonly widthUm?: number;
}

/** A trait as measured on one unit, with its standard uncertainty. `index` is the caller's handle on the readings. */
export interface Observation extends Unit, Uncertain {
  readonly index: number;
}

/** Prior standard deviations of a trait between lots, wafers, dies and guides, in the trait's unit. */
export interface Spread {
  readonly lotSd: number;
  readonly waferSd: number;
  readonly dieSd: number;
  readonly guideSd: number;
}

/** What a guide's trait is taken to be, and on what that rests. */
export interface Estimate extends Uncertain {
  readonly basis: Basis;
  /** Id of the unit whose readings were used; the platform's for basis `platform`. */
  readonly from: string;
  /** Handles of the observations used. */
  readonly used: readonly number[];
  /** True when only guides of another design width were there to inherit from. */
  readonly otherWidth: boolean;
}

/** A level whose own spread is estimated needs this many units; with fewer the platform's prior stands. */
export const UNITS_FOR_OWN_SPREAD = 4;

/** Shares of a platform default's variance by level: lots differ more than wafers, wafers more than dies and guides. */
const DEFAULT_SHARES = { lot: 0.8, wafer: 0.1, die: 0.05, guide: 0.05 };

/**
 * Prior spreads when the platform gives a default but no prior: the default's variance, most of it between lots (common
 * practice, no source).
 * @param u standard uncertainty of the default
 */
export function spreadFromDefault(u: number): Spread {
  return {
    lotSd: u * Math.sqrt(DEFAULT_SHARES.lot),
    waferSd: u * Math.sqrt(DEFAULT_SHARES.wafer),
    dieSd: u * Math.sqrt(DEFAULT_SHARES.die),
    guideSd: u * Math.sqrt(DEFAULT_SHARES.guide),
  };
}

/** Estimates of one trait for every guide of a lot. */
export interface Pool {
  /** `guide`'s trait; its `die` and `guide` must be given. */
  estimate(guide: Required<Omit<Unit, "widthUm">> & { readonly widthUm?: number }): Estimate;
}

interface Level extends Uncertain {
  /** Spread of the units below this one. */
  readonly sd: number;
  readonly used: readonly number[];
}

/**
 * Inheritance: a guide without its own reading takes the mean of its die, else of its wafer, else of its lot, else the
 * platform's default; the variance of every level crossed is added. Within a level, units are averaged with weights
 * 1/(u² + sd²), sd the spread between them (one-way random effects with known variances; S. R. Searle, G. Casella &
 * C. E. McCulloch, *Variance Components*, Wiley 1992, ch. 3; from memory).
 *
 * @param fallback the platform's default, or null when it has none: then a guide with nothing to inherit is a RangeError
 */
export function inherit(
  observations: readonly Observation[],
  spread: Spread,
  fallback: (Uncertain & { readonly from: string }) | null,
  lot: string,
): Pool {
  const byDie = groupBy(observations.filter((o) => o.die !== undefined), (o) => o.die!);
  const byWafer = groupBy(observations, (o) => o.wafer);
  const cache = new Map<string, Level | null>();
  const cached = (key: string, make: () => Level | null): Level | null => {
    const held = cache.get(key);
    if (held !== undefined) return held;
    const made = make();
    cache.set(key, made);
    return made;
  };

  const dieLevel = (die: string, width: number | undefined) =>
    cached(`d|${die}|${width}`, () => {
      const own = pick(byDie.get(die) ?? [], width);
      const guides = [...groupBy(own.filter((o) => o.guide !== undefined), (o) => o.guide!).values()].map(
        together,
      );
      return combine(guides, own.filter((o) => o.guide === undefined), spread.guideSd);
    });
  const waferLevel = (wafer: string, width: number | undefined) =>
    cached(`w|${wafer}|${width}`, () => {
      const own = pick(byWafer.get(wafer) ?? [], width);
      const dies = new Set(own.filter((o) => o.die !== undefined).map((o) => o.die!));
      const levels = [...dies].map((d) => dieLevel(d, width)).filter((l) => l !== null);
      return combine(levels, own.filter((o) => o.die === undefined), spread.dieSd);
    });
  const lotLevel = (width: number | undefined) =>
    cached(`l|${width}`, () => {
      const levels = [...byWafer.keys()].map((w) => waferLevel(w, width)).filter((l) => l !== null);
      return combine(levels, [], spread.waferSd);
    });

  return {
    estimate({ wafer, die, guide, widthUm }) {
      const inDie = byDie.get(die) ?? [];
      const own = inDie.filter((o) => o.guide === guide);
      if (own.length > 0) {
        const { value, u, used } = together(own);
        return { value, u, used, basis: "measured", from: guide, otherWidth: false };
      }
      const tiers = [
        { basis: "die", from: die, level: (w?: number) => dieLevel(die, w), crossed: [] },
        {
          basis: "wafer",
          from: wafer,
          level: (w?: number) => waferLevel(wafer, w),
          crossed: [spread.guideSd],
        },
        {
          basis: "lot",
          from: lot,
          level: (w?: number) => lotLevel(w),
          crossed: [spread.dieSd, spread.guideSd],
        },
      ] as const;
      for (const { basis, from, level, crossed } of tiers) {
        const same = level(widthUm);
        const found = same ?? (widthUm === undefined ? null : level(undefined));
        if (found === null) continue;
        const variance = [found.u, found.sd, ...crossed].reduce((sum, s) => sum + s * s, 0);
        return {
          value: found.value,
          u: Math.sqrt(variance),
          used: found.used,
          basis,
          from,
          otherWidth: same === null,
        };
      }
      if (fallback === null) {
        throw new RangeError(`Cannot estimate a trait of ${guide}: no reading and no platform default`);
      }
      return {
        value: fallback.value,
        u: fallback.u,
        used: [],
        basis: "platform",
        from: fallback.from,
        otherWidth: false,
      };
    },
  };
}

/** Observations that may speak for guides of a width: those of that width and those of no stated width. */
function pick(observations: readonly Observation[], width: number | undefined): readonly Observation[] {
  if (width === undefined) return observations;
  return observations.filter((o) => o.widthUm === undefined || o.widthUm === width);
}

function together(observations: readonly Observation[]): Uncertain & { used: number[] } {
  return { ...weightedMean(observations), used: observations.map((o) => o.index) };
}

/** Mean of units that scatter by a spread, and of readings that belong to the level itself. */
function combine(
  units: readonly (Uncertain & { readonly used: readonly number[] })[],
  direct: readonly Observation[],
  priorSd: number,
): Level | null {
  if (units.length + direct.length === 0) return null;
  const sd = units.length >= UNITS_FOR_OWN_SPREAD ? ownSpread(units) : priorSd;
  const scattered = units.map((x) => ({ value: x.value, u: Math.hypot(x.u, sd) }));
  const { value, u } = weightedMean([...scattered, ...direct]);
  return { value, u, sd, used: [...units.flatMap((x) => x.used), ...direct.map((o) => o.index)] };
}

/** Spread between units, their own reading variance taken off (method of moments, not below 0). */
function ownSpread(units: readonly Uncertain[]): number {
  const total = standardDeviation(units.map((x) => x.value)) ** 2;
  return Math.sqrt(Math.max(0, total - mean(units.map((x) => x.u * x.u))));
}

function groupBy<T>(items: readonly T[], key: (item: T) => string): Map<string, T[]> {
  const groups = new Map<string, T[]>();
  for (const item of items) {
    const k = key(item);
    const group = groups.get(k);
    if (group === undefined) groups.set(k, [item]);
    else group.push(item);
  }
  return groups;
}
