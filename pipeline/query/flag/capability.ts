import {
  type Capability,
  capabilityOf,
  LEAST_CAPABILITY_VALUES,
  type NoCapability,
  type Specification,
} from "../../../models/decision/charts/mod.ts";
import { nestedVariance } from "../../../models/decision/wafer/mod.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import type { LotFacts } from "./facts.ts";
import type { Rule, RuleOf } from "./rules.ts";
import { type DieMean, type Series, seriesOf, seriesWords, unitOf } from "./series.ts";
import { limitsOf } from "./trait_rules.ts";
import { type Flag, mergeRefs, num, percent, plural } from "./types.ts";

/** How well the dies of a lot or wafer keep within the limits of a trait. */
export interface TraitCapability {
  /** The rule that states the limits. */
  readonly rule: string;
  readonly series: Series;
  readonly limits: Specification;
  /** The limits in words. */
  readonly words: string;
  /** Null: the whole lot. */
  readonly wafer: string | null;
  readonly dies: readonly DieMean[];
  /** Independent dies that say as much: fewer than the dies of several wafers, which share their wafer's fate. */
  readonly effective: number;
  readonly found: Capability | NoCapability;
}

/** Capability of every trait with limits, of the lot and of each wafer; the limits are those of the rules `trait_limit`. */
export function capabilities(facts: LotFacts, rules: readonly Rule[]): TraitCapability[] {
  const own = rules.filter((r): r is RuleOf<"trait_limit"> => r.kind === "trait_limit");
  return own.flatMap((rule) =>
    seriesOf(facts.traits, [rule.trait], facts.platform).flatMap((series): TraitCapability[] => {
      const found = limitsOf(rule, series, facts);
      const [above, below] = [
        found.filter((l) => l.side === "above"),
        found.filter((l) => l.side === "below"),
      ];
      const limits: Specification = {
        ...(above.length === 0 ? {} : { upper: Math.min(...above.map((l) => l.at)) }),
        ...(below.length === 0 ? {} : { lower: Math.max(...below.map((l) => l.at)) }),
      };
      if (found.length === 0 || (limits.lower ?? -Infinity) >= (limits.upper ?? Infinity)) return [];
      const words = found.map((l) => `${l.side === "above" ? "at most" : "at least"} ${num(l.at)}`).join(
        ", ",
      );
      const common = { rule: rule.rule, series, limits, words };
      const wafers = [...Map.groupBy(series.dies, (d) => d.wafer)];
      return [
        { ...common, wafer: null, ...judged(series.dies, limits) },
        ...(wafers.length < 2
          ? []
          : wafers.map(([wafer, dies]) => ({ ...common, wafer, ...judged(dies, limits) }))),
      ];
    })
  );
}

/** Values of dies against limits; dies of several wafers count as as many as say the same independently. */
function judged(dies: readonly DieMean[], limits: Specification) {
  const values = dies.map((d) => d.value);
  const effective = effectiveCount(dies);
  const found = effective < LEAST_CAPABILITY_VALUES && dies.length >= LEAST_CAPABILITY_VALUES
    ? {
      refused: `the ${dies.length} dies share their wafers' fates and say as much as ${
        num(effective, 2)
      } independent ones, need ${LEAST_CAPABILITY_VALUES}`,
    }
    : capabilityOf({ n: effective, mean: mean(values), s: standardDeviation(values) }, limits);
  return { dies, effective, found };
}

/** n over what the mean of n dies varies more than that of independent ones: 1 + (m − 1)·share between wafers (L. Kish, Survey Sampling, 1965). */
function effectiveCount(dies: readonly DieMean[]): number {
  const sizes = [...Map.groupBy(dies, (d) => d.wafer).values()].map((w) => w.length);
  if (sizes.length < 2) return dies.length;
  const found = nestedVariance(dies.map((d) => ({ value: d.value, groups: [d.wafer] })), ["wafer", "die"], 0);
  if ("refused" in found) return dies.length;
  const between = Math.max(0, found.levels.find((l) => l.names.includes("wafer"))?.share ?? 0);
  const typical = sizes.reduce((sum, n) => sum + n * n, 0) / dies.length;
  return dies.length / (1 + (typical - 1) * between);
}

/** Traits whose dies demonstrably keep their limits worse than asked: even the upper confidence limit of cpk is too low. */
export function capabilityLow(facts: LotFacts, rule: RuleOf<"capability">, rules: readonly Rule[]): Flag[] {
  return capabilities(facts, rules).flatMap((c): Flag[] => {
    const { found, series, wafer } = c;
    // A wafer's own is told; that of the lot where there is but one.
    const one = new Set(series.dies.map((d) => d.wafer)).size < 2;
    if ("refused" in found || (wafer === null && !one) || !(found.cpk.hi < rule.cpk_at_least)) return [];
    const id = wafer ?? series.dies[0]!.wafer;
    const unit = unitOf(series.trait);
    return [{
      scope: "wafer",
      id,
      lot: facts.lot,
      rule: rule.rule,
      severity: found.cpk.hi < rule.watch_below ? "watch" : rule.severity,
      brief: `${seriesWords(series)}: cpk ${num(found.cpk.value, 2)}`,
      statement: `Wafer ${id}: ${seriesWords(series)} of ${plural(c.dies.length, "die")} is ${
        num(found.mean)
      } ± ${num(found.s, 2)}${unit} (standard deviation), the limits are ${c.words}${unit}: cpk ${
        num(found.cpk.value, 2)
      } (${num(found.cpk.lo, 2)} to ${num(found.cpk.hi, 2)}), less than ${
        num(rule.cpk_at_least)
      }; of normal dies ${percent(found.outside)} are beyond`,
      evidence: {
        numbers: {
          trait: series.trait,
          cpk: found.cpk.value,
          cpk_low: found.cpk.lo,
          cpk_high: found.cpk.hi,
          cp: found.cp?.value ?? null,
          mean: found.mean,
          sd: found.s,
          lower: c.limits.lower ?? null,
          upper: c.limits.upper ?? null,
          dies_read: c.dies.length,
          share_beyond: found.outside,
        },
        readings: mergeRefs(c.dies.flatMap((d) => d.refs)),
        dies: c.dies.map((d) => d.unit),
      },
      suspects: [],
    }];
  });
}
