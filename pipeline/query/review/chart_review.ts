import { RUN_RULES } from "../../../models/decision/charts/mod.ts";
import type { CapabilityReview, ChartReview, WaferChartReview } from "../../review_types.ts";
import { capabilities } from "../flag/capability.ts";
import type { LotFacts, LotSummary } from "../flag/facts.ts";
import { lotCharts } from "../flag/lot_chart.ts";
import type { Rule } from "../flag/rules.ts";
import { seriesWords, unitOf } from "../flag/series.ts";
import { waferCharts, waferChartSentence } from "../flag/wafer_chart.ts";

/** Individuals charts over the lots. */
export function chartsOf(own: LotSummary, all: readonly LotSummary[], rules: readonly Rule[]): ChartReview[] {
  return rules.flatMap((rule) => rule.kind === "lot_chart" ? lotCharts(own, all, rule) : []).map((c) => ({
    key: c.key,
    words: c.words,
    unit: c.unit.trim(),
    centre: c.centre,
    lower: c.lower,
    upper: c.upper,
    points: c.lots.map((lot, k) => ({ lot, value: c.values[k]!, z: c.z[k]! })),
    signals: c.signals.map((s) => RUN_RULES[s.rule]),
  }));
}

/** NaN has no place in JSON. */
const orNull = (x: number): number | null => Number.isNaN(x) ? null : x;

/** Charts of the means and spreads of wafers. */
export function waferChartsOf(
  own: LotSummary,
  all: readonly LotSummary[],
  rules: readonly Rule[],
): WaferChartReview[] {
  return rules.flatMap((rule) => rule.kind === "lot_chart" ? waferCharts(own, all, rule) : []).map((c) => ({
    key: c.key,
    words: c.words,
    unit: c.unit.trim(),
    centre: c.centre,
    limits: c.limits,
    lots_before: c.lotsBefore,
    within_sd: c.withinSd,
    between_sd: c.betweenSd,
    points: c.points.map((p) => ({
      lot: p.lot,
      wafer: p.wafer,
      dies: p.dies,
      mean: p.mean,
      within_lower: p.withinLower,
      within_upper: p.withinUpper,
      z: p.z,
      s: orNull(p.s),
      s_centre: orNull(p.sCentre),
      s_lower: orNull(p.sLower),
      s_upper: orNull(p.sUpper),
    })),
    sentence: waferChartSentence(c, own.lot),
  }));
}

/** Capability of the traits with limits, of the lot and of each wafer. */
export function capabilitiesOf(facts: LotFacts, rules: readonly Rule[]): CapabilityReview[] {
  return capabilities(facts, rules).map((c): CapabilityReview => {
    const found = "refused" in c.found ? null : c.found;
    return {
      key: c.series.key,
      words: seriesWords(c.series),
      unit: unitOf(c.series.trait).trim(),
      rule: c.rule,
      limits: c.words,
      lower: c.limits.lower ?? null,
      upper: c.limits.upper ?? null,
      wafer: c.wafer,
      dies: c.dies.length,
      effective_dies: c.effective,
      mean: found?.mean ?? null,
      sd: found?.s ?? null,
      cp: found?.cp ?? null,
      cpk: found?.cpk ?? null,
      cpk_at_least: found?.cpkAtLeast ?? null,
      outside: found?.outside ?? null,
      refused: "refused" in c.found ? c.found.refused : null,
    };
  });
}
