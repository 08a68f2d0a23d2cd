import { compareIds } from "../../../shared/ids.ts";
import type { LotFacts, LotSummary } from "./facts.ts";
import { earlierLots } from "./earlier_lots.ts";
import { lotChart } from "./lot_chart.ts";
import { waferChartFlags } from "./wafer_chart.ts";
import {
  coverageThin,
  figureLimit,
  noOperatingPoint,
  outcomeResidual,
  yieldFloor,
} from "./prediction_rules.ts";
import { capabilityLow } from "./capability.ts";
import { coatingOffTarget, coatingUnknown } from "./coating_rules.ts";
import { contradicted, quarantined, readingRemarks, unlistedCut } from "./reading_rules.ts";
import { periodOff } from "./period_rule.ts";
import { repeatedReadings, scanResidual } from "./residual_rules.ts";
import type { Rule, RuleOf } from "./rules.ts";
import { seriesOf, summaryOf } from "./series.ts";
import { spreadGrowth } from "./spread_rules.ts";
import { traitLimit, waferContrast } from "./trait_rules.ts";
import { TRAIT_NAMES } from "./facts.ts";
import { type Flag, SEVERITY_ORDER } from "./types.ts";

/**
 * Every flag of a lot by some rules, worst first. Pure: the same facts give the same flags.
 * @param summaries all lots of the platform, for what is compared over lots; the lot itself need not be among them
 */
export function flagsOf(facts: LotFacts, rules: readonly Rule[], summaries: readonly LotSummary[]): Flag[] {
  const own = summaries.find((s) => s.lot === facts.lot) ?? summaryOfFacts(facts);
  const order = new Map(rules.map((r, k) => [r.rule, k]));
  const flags = rules.filter((r) => r.platform === undefined || r.platform === facts.platform.platform)
    .flatMap((rule) => flagsOfRule(facts, rule, rules, own, summaries));
  return withoutEchoes(flags).sort((a, b) =>
    SEVERITY_ORDER[a.severity] - SEVERITY_ORDER[b.severity] || order.get(a.rule)! - order.get(b.rule)! ||
    compareIds(a.id, b.id)
  );
}

function flagsOfRule(
  facts: LotFacts,
  rule: Rule,
  rules: readonly Rule[],
  own: LotSummary,
  all: readonly LotSummary[],
): Flag[] {
  switch (rule.kind) {
    case "trait_limit":
      return traitLimit(facts, rule);
    case "figure_limit":
      return figureLimit(facts, rule);
    case "wafer_contrast":
      return waferContrast(facts, rule);
    case "yield_floor":
      return yieldFloor(facts, rule);
    case "no_operating_point":
      return noOperatingPoint(facts, rule);
    case "coating_off_target":
      return coatingOffTarget(facts, rule);
    case "coating_unknown":
      return coatingUnknown(facts, rule);
    case "period_off":
      return periodOff(facts, rule);
    case "scan_residual":
      return scanResidual(facts, rule);
    case "reading_remarks":
      return readingRemarks(facts, rule);
    case "contradiction":
      return contradicted(facts, rule);
    case "repeated_readings":
      return repeatedReadings(facts, rule);
    case "outcome_residual":
      return outcomeResidual(facts, rule);
    case "unlisted_cut":
      return unlistedCut(facts, rule);
    case "coverage_thin":
      return coverageThin(facts, rule);
    case "quarantine":
      return quarantined(facts, rule);
    case "lot_chart":
      return chartFlags(facts, rule, own, all);
    case "capability":
      return capabilityLow(facts, rule, rules);
    case "spread_growth":
      return spreadGrowth(facts, rule, earlierLots(own, all));
  }
}

function chartFlags(
  facts: LotFacts,
  rule: RuleOf<"lot_chart">,
  own: LotSummary,
  all: readonly LotSummary[],
): Flag[] {
  const refs = (key: string, wafer?: string) =>
    seriesOf(facts.traits, rule.traits, facts.platform).filter((s) => s.key === key)
      .flatMap((s) => s.dies.filter((d) => wafer === undefined || d.wafer === wafer))
      .flatMap((d) => d.refs);
  const lots = lotChart(own, all, rule, facts.platform.platform, refs);
  if (rule.wafers === undefined) return lots;
  const wafers = waferChartFlags(own, all, rule, rule.wafers, refs);
  // A lot whose wafers are all out is told as a lot.
  const told = new Set(lots.map((f) => f.evidence.numbers.series).filter((s) => s !== undefined));
  const out = Map.groupBy(wafers, (f) => f.evidence.numbers.series);
  const whole = (key: unknown) =>
    told.has(key as string) &&
    out.get(key as string)!.length === own.series.get(key as string)!.wafers.length;
  return [...lots, ...wafers.filter((f) => !whole(f.evidence.numbers.series))];
}

/** A wafer that is beyond a limit need not be told to differ from others, or to be incapable, in the same trait as well. */
function withoutEchoes(flags: readonly Flag[]): Flag[] {
  const key = (f: Flag) => `${f.scope}|${f.id}|${f.evidence.numbers.trait}`;
  const rank = ({ evidence: { numbers } }: Flag): number =>
    numbers.limit !== undefined
      ? 0
      : numbers.z !== undefined && numbers.others !== undefined
      ? 1
      : numbers.z !== undefined && numbers.centre !== undefined
      ? 2
      : numbers.cpk !== undefined
      ? 3
      : -1;
  const first = new Map<string, number>();
  for (const f of flags) {
    const r = rank(f);
    if (r >= 0 && f.evidence.numbers.trait !== undefined) {
      first.set(key(f), Math.min(r, first.get(key(f)) ?? r));
    }
  }
  const beyond = flags.filter((f) => f.scope === "wafer" && f.evidence.numbers.limit !== undefined);
  // One or two others are no yardstick if one of them is itself beyond a limit.
  const byWrongYardstick = (f: Flag) =>
    rank(f) === 1 && Number(f.evidence.numbers.other_wafers) < 3 &&
    beyond.some((b) => b.id !== f.id && b.evidence.numbers.trait === f.evidence.numbers.trait);
  return flags.filter((f) => rank(f) <= (first.get(key(f)) ?? Infinity) && !byWrongYardstick(f));
}

/** A lot as the others are summed up. */
export function summaryOfFacts(facts: LotFacts): LotSummary {
  return {
    lot: facts.lot,
    made: facts.made,
    started: facts.started,
    wafers: facts.wafers,
    steps: facts.steps,
    series: new Map(
      seriesOf(facts.traits, TRAIT_NAMES, facts.platform).map((s) => [s.key, summaryOf(s)]),
    ),
    yields: new Map(),
  };
}
