import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import {
  individualsCharts,
  joinSignals,
  RUN_RULES,
  type RunRule,
  runSignals,
  type Signal,
} from "../../../models/decision/charts/mod.ts";
import { normalTwoSided, tTwoSided } from "../../../models/decision/tails.ts";
import type { ReadingRef } from "../../traits/trait_row.ts";
import { earlierLots, leftOut, leftOutSentences } from "./earlier_lots.ts";
import type { LotSummary } from "./facts.ts";
import type { RuleOf, Severity } from "./rules.ts";
import { seriesWords, unitOf } from "./series.ts";
import { suspectsOfLot } from "./suspects_of.ts";
import { type Flag, mergeRefs, num, percent, plural, SEVERITY_ORDER } from "./types.ts";

/** One quantity over the lots of a platform in time order, the lot under review last. */
export interface LotChart {
  /** Key of a series, or `yield|<request>`. */
  readonly key: string;
  readonly words: string;
  readonly unit: string;
  readonly lots: readonly string[];
  readonly values: readonly number[];
  readonly centre: number;
  /** Limits of a further lot: three standard deviations, widened for how few lots they rest on. */
  readonly lower: number;
  readonly upper: number;
  /** Standardised values; the last one corrected for limits that rest on few lots. */
  readonly z: readonly number[];
  /** Signals that the last lot completes. */
  readonly signals: readonly Signal[];
}

/**
 * A new value judged by limits from n earlier ones, turned into what a standard normal would be: with few lots behind them the
 * centre is off by σ/√n and the spread is off, too, and plain 3-sigma limits would alarm several times as often as they
 * promise. The mean of n − 1 moving ranges over d2 has the variance 0.826·σ²/(n − 1) for normal values (neighbouring
 * ranges share a value: d3² + 2·0.163 over d2²), which is that of (n − 1)/1.652 degrees of freedom. Far out
 * that is cautious: at 8 lots 0.07 % of good points come out beyond 3, where plain limits would call 3 % (simulated).
 */
export function correctedZ(z: number, n: number): number {
  const p = tTwoSided(z / Math.sqrt(1 + 1 / n), (n - 1) / 1.652);
  // Far out the tail has no digits left; what counts there is only that it is far out.
  return Math.sign(z) * (p < 1e-12 ? 7 : -normalQuantile(p / 2, 0, 1));
}

/** Keys of quantities that can't be below 0. */
const NEVER_NEGATIVE = /^(yield|merged|duty_sd)\|/;

/** How many standard deviations of the lots before a new value may be away: as improbable as three of a known spread. */
function reachOf(n: number): number {
  let [low, high] = [3, 1e4];
  for (let k = 0; k < 60; k++) {
    const middle = Math.sqrt(low * high);
    if (correctedZ(middle, n) > 3) high = middle;
    else low = middle;
  }
  return low;
}

function chartOf(
  key: string,
  words: string,
  unit: string,
  lots: readonly LotSummary[],
  value: (lot: LotSummary) => number | null,
  rules: readonly RunRule[],
  least: number,
): LotChart | null {
  const points = lots.map((l) => ({ lot: l.lot, value: value(l) })).filter((p) => p.value !== null) as {
    lot: string;
    value: number;
  }[];
  const n = points.length - 1;
  if (n < least || points.at(-1)!.lot !== lots.at(-1)!.lot) return null;
  const values = points.map((p) => p.value);
  const { centre, sigma, individuals } = individualsCharts(values, { baseline: n, rules });
  const last = individuals.points.at(-1)!;
  const z = individuals.points.map((p) => p.z);
  if (Number.isNaN(last.z)) return null; // earlier lots that do not differ at all judge nothing
  z[n] = correctedZ(last.z, n);
  const reach = reachOf(n);
  const signals = joinSignals(runSignals(z, rules).filter((s) => s.at === n));
  return {
    key,
    words,
    unit,
    lots: points.map((p) => p.lot),
    values,
    centre,
    // Nothing is below none or above all: limits out there would only widen the picture.
    lower: Math.max(NEVER_NEGATIVE.test(key) ? 0 : -Infinity, centre - reach * sigma),
    upper: Math.min(key.startsWith("yield|") ? 1 : Infinity, centre + reach * sigma),
    z,
    signals,
  };
}

/** A series by its key, as people say it, with its unit. */
export function wordsOfKey(key: string): { words: string; unit: string } {
  const [trait, nm, pol, process] = key.split("|") as [string, string, string, string];
  const words = seriesWords({
    trait: trait as never,
    wavelength_nm: nm === "" ? null : Number(nm),
    polarisation: pol === "" ? null : pol as "TE" | "TM",
    process: process === "" ? null : process,
  });
  return { words, unit: unitOf(trait) };
}

/** Charts of everything that a rule names, for which enough earlier lots were read. */
export function lotCharts(
  lot: LotSummary,
  all: readonly LotSummary[],
  rule: RuleOf<"lot_chart">,
): LotChart[] {
  const lots = [...earlierLots(lot, all), lot];
  const rules = Object.keys(rule.run_rules) as RunRule[];
  const charts: (LotChart | null)[] = [];
  for (const key of lot.series.keys()) {
    if (!(rule.traits as string[]).includes(key.split("|")[0]!)) continue;
    const { words, unit } = wordsOfKey(key);
    const value = (l: LotSummary) => l.series.get(key)?.mean ?? null;
    charts.push(chartOf(key, words, unit, lots, value, rules, rule.least_earlier_lots));
  }
  for (const request of rule.yields ? lot.yields.keys() : []) {
    const value = (l: LotSummary) => {
      const y = l.yields.get(request);
      return y === undefined || y.of === 0 ? null : y.good / y.of;
    };
    charts.push(
      chartOf(
        `yield|${request}`,
        `yield of dies for ${request}`,
        "",
        lots,
        value,
        rules,
        rule.least_earlier_lots,
      ),
    );
  }
  return charts.filter((c) => c !== null);
}

/** Flags of a lot's charts; where there are too few lots for any, one note says so. */
export function lotChart(
  lot: LotSummary,
  all: readonly LotSummary[],
  rule: RuleOf<"lot_chart">,
  platform: string,
  readingsOf: (key: string) => readonly ReadingRef[],
): Flag[] {
  const base = { scope: "lot" as const, id: lot.lot, lot: lot.lot, rule: rule.rule };
  const earlier = earlierLots(lot, all);
  const charts = lotCharts(lot, all, rule);
  const sentences = leftOutSentences(leftOut(lot, all));
  const aside = sentences.length === 0 ? "" : `; ${sentences.join("; ")}`;
  if (charts.length === 0) {
    const why = lot.started === null
      ? `Lot ${lot.lot} states no start date in lot.json: it has no place in time among the lots of ${platform}`
      : earlier.length < rule.least_earlier_lots
      ? `Too few lots for control charts: ${earlier.length} of platform ${platform} before ${lot.lot}, need ${rule.least_earlier_lots}${aside}`
      : `No quantity of lot ${lot.lot} was read in ${rule.least_earlier_lots} earlier lots of ${platform}: no control chart${aside}`;
    return [{
      ...base,
      severity: "note",
      brief: "no control chart",
      statement: why,
      evidence: { numbers: { earlier_lots: earlier.length, needed: rule.least_earlier_lots }, readings: [] },
      suspects: [],
    }];
  }
  return charts.filter((c) => c.signals.length > 0).map((c) => {
    // Every chart is one more chance to be out: what has to be decided must be so improbable that none of them is by chance.
    const p = normalTwoSided(c.z.at(-1)!) * charts.length;
    const severities = c.signals.map((s) => rule.run_rules[s.rule]!)
      .map((s) => s === "act" && p >= rule.act_alpha ? "watch" : s);
    const severity = severities.reduce((a: Severity, b) => SEVERITY_ORDER[b] < SEVERITY_ORDER[a] ? b : a);
    const shown = (x: number) => c.key.startsWith("yield|") ? percent(x) : `${num(x)}${c.unit}`;
    return {
      ...base,
      severity,
      brief: `${c.words} ${shown(c.values.at(-1)!)}, earlier lots ${shown(c.centre)}`,
      statement: `Lot ${lot.lot}: ${c.words} is ${shown(c.values.at(-1)!)}; the ${
        plural(c.lots.length - 1, "lot")
      } before have ${shown(c.centre)} on average, limits ${shown(c.lower)} to ${shown(c.upper)}: ${
        c.signals.map((s) => RUN_RULES[s.rule]).join("; ")
      }${aside}`,
      evidence: {
        numbers: {
          quantity: c.words,
          series: c.key,
          value: c.values.at(-1)!,
          centre: c.centre,
          lower: c.lower,
          upper: c.upper,
          z: c.z.at(-1)!,
          earlier_lots: c.lots.length - 1,
          run_rules: c.signals.map((s) => s.rule).join(", "),
        },
        readings: mergeRefs(readingsOf(c.key)),
      },
      suspects: suspectsOfLot(lot, earlier),
    };
  });
}
