import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import {
  type GroupCharts,
  groupCharts,
  type NestedLimits,
  nestedLimits,
} from "../../../models/decision/charts/mod.ts";
import { tTwoSided } from "../../../models/decision/tails.ts";
import { mean } from "../../../shared/statistics.ts";
import type { ReadingRef } from "../../traits/trait_row.ts";
import { earlierLots } from "./earlier_lots.ts";
import type { LotSummary } from "./facts.ts";
import { wordsOfKey } from "./lot_chart.ts";
import type { RuleOf, Severity } from "./rules.ts";
import { type Flag, mergeRefs, num, plural } from "./types.ts";

/** A wafer on a chart of means. */
export interface WaferPoint {
  readonly lot: string;
  readonly wafer: string;
  readonly dies: number;
  readonly mean: number;
  /** Limits that the scatter of the dies alone would give (X-bar). */
  readonly withinLower: number;
  readonly withinUpper: number;
  /** Distance from the centre as that of a standard normal, of this lot's wafers; null where it is not judged. */
  readonly z: number | null;
  /** Standard deviation between dies, with its limits; NaN for a single die. */
  readonly s: number;
  readonly sCentre: number;
  readonly sLower: number;
  readonly sUpper: number;
}

/** Mean and spread of the dies of every wafer of a platform in time order, this lot's wafers last. */
export interface WaferChart {
  readonly key: string;
  readonly words: string;
  readonly unit: string;
  /** From the lots before; from all wafers where there are too few. */
  readonly centre: number;
  /** Limits that wafers of good lots keep, three standard deviations out; null where too few lots were read before. */
  readonly limits: { readonly lower: number; readonly upper: number } | null;
  readonly points: readonly WaferPoint[];
  readonly lotsBefore: number;
  /** Standard deviation of dies within a wafer, and between wafers of a lot beyond that; null: none, or not known. */
  readonly withinSd: number;
  readonly betweenSd: number | null;
}

/** As many wafers with two dies or more make a chart. */
const LEAST_WAFERS = 3;

/** Charts of wafer means and spreads of everything that a rule names. */
export function waferCharts(
  lot: LotSummary,
  all: readonly LotSummary[],
  rule: RuleOf<"lot_chart">,
): WaferChart[] {
  const lots = [...earlierLots(lot, all), lot];
  return [...lot.series.keys()].filter((key) => (rule.traits as string[]).includes(key.split("|")[0]!))
    .map((key) => chartOf(key, lots, rule.least_earlier_lots)).filter((c) => c !== null);
}

function chartOf(key: string, lots: readonly LotSummary[], least: number): WaferChart | null {
  const groups = lots.flatMap((l) =>
    (l.series.get(key)?.wafers ?? []).filter((w) => w.values.length > 0).map((w) => ({ lot: l.lot, ...w }))
  );
  const own = lots.at(-1)!.lot;
  const before = groups.filter((g) => g.lot !== own).length;
  if (groups.filter((g) => g.values.length > 1).length < LEAST_WAFERS) return null;
  const charts = groupsChart(groups.map((g) => g.values), before);
  if (charts === null) return null;
  const batches = [...Map.groupBy(groups.slice(0, before), (g) => g.lot).values()].map((b) =>
    b.map((g) => ({ mean: mean(g.values), values: g.values.length }))
  );
  const found = batches.length >= least ? nestedLimits(batches) : null;
  const typical = before === 0 ? NaN : mean(groups.slice(0, before).map((g) => 1 / g.values.length));
  const judged = found === null ? null : {
    found,
    sd: (dies: number) =>
      Math.hypot(found.sd, found.uCentre, charts.sigma * Math.sqrt(Math.max(0, 1 / dies - typical))),
  };
  const points = groups.map((g, k): WaferPoint => {
    const [m, s] = [charts.means.points[k]!, charts.spreads.points[k]!];
    return {
      lot: g.lot,
      wafer: g.wafer,
      dies: g.values.length,
      mean: m.value,
      withinLower: m.lower,
      withinUpper: m.upper,
      z: judged === null || g.lot !== own
        ? null
        : normalScore((m.value - found!.centre) / judged.sd(g.values.length), found!.degreesOfFreedom),
      s: s.value,
      sCentre: s.centre,
      sLower: s.lower,
      sUpper: s.upper,
    };
  });
  const dies = points.at(-1)!.dies;
  return {
    key,
    ...wordsOfKey(key),
    centre: found?.centre ?? charts.centre,
    limits: judged === null ? null : {
      lower: found!.centre - reach(found!) * judged.sd(dies),
      upper: found!.centre + reach(found!) * judged.sd(dies),
    },
    points,
    lotsBefore: batches.length,
    withinSd: charts.sigma,
    betweenSd: found?.betweenGroups ?? null,
  };
}

/** The chart of means and standard deviations; its limits from the lots before where two dies of some wafer were read there. */
function groupsChart(groups: readonly (readonly number[])[], before: number): GroupCharts | null {
  const carried = groups.slice(0, before).some((g) => g.length > 1) ? { baseline: before } : {};
  const charts = groupCharts(groups, "deviation", { rules: ["beyond_3s"], ...carried });
  return charts.sigma > 0 ? charts : null;
}

/** Student's t as the standard normal value of the same tail. */
function normalScore(t: number, df: number): number {
  const p = tTwoSided(t, df);
  return Math.sign(t) * (p < 1e-12 ? 7 : -normalQuantile(p / 2, 0, 1));
}

/** How many standard deviations of so few lots are three of many: found by halving. */
function reach({ degreesOfFreedom }: NestedLimits): number {
  let [low, high] = [3, 1e3];
  for (let k = 0; k < 60; k++) {
    const middle = Math.sqrt(low * high);
    if (normalScore(middle, degreesOfFreedom) > 3) high = middle;
    else low = middle;
  }
  return low;
}

/** What a wafer chart says of this lot, in words. */
export function waferChartSentence(c: WaferChart, lot: string): string {
  const own = c.points.filter((p) => p.lot === lot);
  const shown = (x: number) => `${num(x)}${c.unit}`;
  if (c.limits === null) {
    return `Not judged: wafers of ${
      plural(c.lotsBefore, "lot")
    } before were read. The inner limits are what the scatter of dies (${
      shown(c.withinSd)
    }) alone would allow a wafer's mean`;
  }
  const out = own.filter((p) => Math.abs(p.z!) > 3);
  const between = c.betweenSd === null ? "" : `; wafers of one lot differ by ${shown(c.betweenSd)}`;
  const limits = `limits ${shown(c.limits.lower)} to ${shown(c.limits.upper)} from ${
    plural(c.lotsBefore, "lot")
  } before`;
  const head = out.length === 0
    ? `${own.length === 1 ? "The wafer of this lot is" : "All wafers of this lot are"} within the ${limits}`
    : `${out.map((p) => `${p.wafer} with ${shown(p.mean)}`).join(", ")} beyond the ${limits}`;
  return `${head}. Dies of a wafer scatter by ${shown(c.withinSd)}${between}`;
}

/** Wafers of the lot beyond the limits of those before. */
export function waferChartFlags(
  lot: LotSummary,
  all: readonly LotSummary[],
  rule: RuleOf<"lot_chart">,
  severity: Severity,
  readingsOf: (key: string, wafer: string) => readonly ReadingRef[],
): Flag[] {
  return waferCharts(lot, all, rule).flatMap((c) =>
    c.points.filter((p) => p.z !== null && Math.abs(p.z) > 3).map((p): Flag => ({
      scope: "wafer",
      id: p.wafer,
      lot: lot.lot,
      rule: rule.rule,
      severity,
      brief: `${c.words} ${num(p.mean)}${c.unit}, wafers of earlier lots ${num(c.centre)}${c.unit}`,
      statement: `Wafer ${p.wafer}: ${c.words} is ${num(p.mean)}${c.unit} on average of ${
        plural(p.dies, "die")
      }; wafers of the ${plural(c.lotsBefore, "lot")} before have ${num(c.centre)}${c.unit}, limits ${
        num(c.limits!.lower)
      } to ${num(c.limits!.upper)}${c.unit}: one wafer beyond 3 standard deviations`,
      evidence: {
        numbers: {
          trait: c.key.split("|")[0]!,
          series: c.key,
          value: p.mean,
          centre: c.centre,
          lower: c.limits!.lower,
          upper: c.limits!.upper,
          z: p.z!,
          lots_before: c.lotsBefore,
        },
        readings: mergeRefs(readingsOf(c.key, p.wafer)),
      },
      suspects: [],
    }))
  );
}
