import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import { exactInterval, expectedYield, scoreInterval, yieldRange } from "../../../models/decision/yields.ts";
import { compareIds } from "../../../shared/ids.ts";
import { CONFIDENCE, type ExpectedDies, type ShareOf } from "../../review_types.ts";
import type { DecisionFact } from "../flag/facts.ts";
import { byWafer, type DieVerdict, dieVerdicts, lotYield } from "../flag/verdicts.ts";

/** How many of some dies are accepted, with every interval, and how many the probabilities let one expect. */
export function shareOf(dies: readonly DieVerdict[]): ShareOf {
  const y = lotYield(dies, CONFIDENCE);
  return {
    ...y,
    value: Number.isNaN(y.value) ? null : y.value,
    exact: exactInterval(y.good, y.of, CONFIDENCE),
    score: scoreInterval(y.good, y.of, CONFIDENCE),
    expected: expectedOf(dies.filter((d) => d.unavailable === null)),
  };
}

/**
 * Good dies to be expected: each die counts with the probability of the guide that stands for it. Dies rest in part on the
 * same readings, so the number scatters more than that of independent dies and less than if a wafer's dies went together.
 */
function expectedOf(dies: readonly DieVerdict[]): ExpectedDies | null {
  if (dies.length === 0) return null;
  const probabilities = dies.map((d) => d.best.probability);
  const { expected, sdTogether } = expectedYield(probabilities, dies.map((d) => d.wafer));
  const { low, high } = yieldRange(probabilities, CONFIDENCE);
  const half = normalQuantile((1 + CONFIDENCE) / 2, 0, 1) * sdTogether;
  return {
    dies: expected,
    low,
    high,
    together_low: Math.min(low, Math.max(0, expected - half)),
    together_high: Math.max(high, Math.min(dies.length, expected + half)),
  };
}

export const waferShares = (dies: readonly DieVerdict[]): (ShareOf & { readonly wafer: string })[] =>
  [...byWafer(dies)].map(([wafer, own]) => ({ wafer, ...shareOf(own) }));

/**
 * Yields by mask group: of the dies that have guides of a group, those with an accepted one among them. Guides of no group
 * are left out; none are given where no guide has a group.
 */
export function groupShares(
  decisions: readonly DecisionFact[],
  groupOf: (guide: string) => string | null,
): (ShareOf & { readonly group: string; readonly matched: boolean })[] {
  const groups = new Map<string, DecisionFact[]>();
  for (const d of decisions) {
    const group = groupOf(d.guide_id);
    if (group === null) continue;
    const held = groups.get(group);
    if (held === undefined) groups.set(group, [d]);
    else held.push(d);
  }
  return [...groups].sort(([a], [b]) => compareIds(a, b)).map(([group, own]) => ({
    group,
    matched: own.some((d) => d.matched),
    ...shareOf(dieVerdicts(own)),
  }));
}
