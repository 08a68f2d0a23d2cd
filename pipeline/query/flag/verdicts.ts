import { groupedYield } from "../../../models/decision/charts/mod.ts";
import { exactInterval } from "../../../models/decision/yields.ts";
import type { DecisionFact, LotFacts, PredictionFacts } from "./facts.ts";

/** The requests that count for a lot: those named by the user, else those that one of its guides can be tuned to. */
export const inPlay = ({ predictions, requestsNamed }: LotFacts): PredictionFacts[] =>
  requestsNamed
    ? predictions.filter((p) => p.named)
    : predictions.filter((p) => p.decisions.some((d) => d.matched));

export interface DieVerdict {
  readonly die: string;
  readonly wafer: string;
  readonly decision: "accept" | "hold" | "reject";
  /** The guide that stands for the die: the most probable, then the one that matches most often, then the first. */
  readonly best: DecisionFact;
  readonly unavailable: string | null;
}

/** Each die by its best guide: accepted with one accepted guide, on hold with one on hold, else rejected. */
export function dieVerdicts(decisions: readonly DecisionFact[]): DieVerdict[] {
  const rank = { accept: 0, hold: 1, reject: 2 } as const;
  const byDie = new Map<string, DecisionFact>();
  for (const d of decisions) {
    const held = byDie.get(d.die_id);
    if (
      held === undefined || rank[d.decision] < rank[held.decision] ||
      d.decision === held.decision &&
        (d.probability > held.probability ||
          d.probability === held.probability && Number(d.matched) > Number(held.matched))
    ) byDie.set(d.die_id, d);
  }
  return [...byDie].map(([die, best]) => ({
    die,
    wafer: best.wafer,
    decision: best.decision,
    best,
    unavailable: best.unavailable,
  }));
}

/** Items by their wafer, in the order of their first. */
export const byWafer = <T extends { readonly wafer: string }>(items: readonly T[]): Map<string, T[]> => {
  const out = new Map<string, T[]>();
  for (const item of items) out.set(item.wafer, [...out.get(item.wafer) ?? [], item]);
  return out;
};

/** Confidence of a two-sided interval whose either end is held with `oneSided`; bounds below a half are not asked for. */
export const twoSided = (oneSided: number): number => Math.max(1e-6, 2 * oneSided - 1);

export interface LotYield {
  readonly good: number;
  readonly hold: number;
  readonly of: number;
  /** NaN for none of none. */
  readonly value: number;
  readonly low: number;
  readonly high: number;
  /** `dies`: counted as independent. `wafers`: widened, because dies of a wafer share its fate. */
  readonly counted: "dies" | "wafers";
}

/** Yield of dies that can be shipped, with its exact interval; with several wafers, that of as many as say the same independently. */
export function lotYield(dies: readonly DieVerdict[], confidence: number): LotYield {
  const ready = dies.filter((d) => d.unavailable === null);
  const count = (of: readonly DieVerdict[], decision: DieVerdict["decision"]) =>
    of.filter((d) => d.decision === decision).length;
  const groups = [...byWafer(ready).values()].map((d) => ({ good: count(d, "accept"), of: d.length }));
  const good = count(ready, "accept");
  const grouped = groups.length >= 2;
  const { low, high } = grouped
    ? groupedYield(groups, confidence)
    : exactInterval(good, ready.length, confidence);
  return {
    good,
    hold: count(ready, "hold"),
    of: ready.length,
    value: good / ready.length,
    low,
    high,
    counted: grouped ? "wafers" : "dies",
  };
}
