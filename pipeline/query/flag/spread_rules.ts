import { compareSpread, type SpreadComparison, spreadOfGroups } from "../../../models/decision/charts/mod.ts";
import { correctPValues } from "../../../models/decision/suspects/mod.ts";
import type { LotFacts, LotSummary, WaferSummary } from "./facts.ts";
import type { RuleOf } from "./rules.ts";
import { type Series, seriesOf, seriesWords, summaryOf, unitOf } from "./series.ts";
import { suspectsOfDies } from "./suspects_of.ts";
import { diesOfWafers } from "./trait_rules.ts";
import { type Flag, mergeRefs, num, plural, pText } from "./types.ts";

interface Test {
  readonly series: Series;
  /** Null: the whole lot. */
  readonly wafer: string | null;
  readonly found: SpreadComparison;
  readonly sd: number;
  readonly dies: number;
  readonly against: string;
}

/** What can be compared of one series: the lot with the lots before, each wafer with its siblings and the lots before. */
function testsOf(series: Series, earlier: readonly LotSummary[]): Test[] {
  const wafers = summaryOf(series).wafers;
  const before = earlier.flatMap((l) => l.series.get(series.key)?.wafers ?? []);
  const lots = earlier.filter((l) => l.series.has(series.key)).length;
  const lotsBefore = lots === 0 ? "" : `the ${plural(lots, "lot")} before`;
  const test = (
    wafer: string | null,
    own: readonly WaferSummary[],
    rest: readonly WaferSummary[],
  ): Test[] => {
    const sample = spreadOfGroups(own);
    const found = compareSpread(sample, spreadOfGroups(rest));
    if (found === null) return [];
    const against = [
      wafer === null || rest.length === before.length ? "" : "the lot's other wafers",
      lotsBefore,
    ]
      .filter((t) => t !== "").join(" and ");
    const dies = own.reduce((sum, w) => sum + w.values.length, 0);
    return [{ series, wafer, found, sd: Math.sqrt(sample.variance), dies, against }];
  };
  return [
    ...test(null, wafers, before),
    ...(wafers.length < 2
      ? []
      : wafers.flatMap((w) => test(w.wafer, [w], [...wafers.filter((o) => o !== w), ...before]))),
  ];
}

/** The wafers that are not named, against the lots before; null where there is nothing to compare. */
function restOf(series: Series, named: ReadonlySet<string>, earlier: readonly LotSummary[]) {
  const before = earlier.flatMap((l) => l.series.get(series.key)?.wafers ?? []);
  const others = summaryOf(series).wafers.filter((w) => !named.has(w.wafer));
  return compareSpread(spreadOfGroups(others), spreadOfGroups(before));
}

/**
 * Dies of a wafer that differ more than those of its siblings and of the lots before. All traits and wafers of the lot are
 * tried, so the p-values are corrected for all of them (Holm): `alpha` is the chance that a fault-free lot is flagged at all.
 */
export function spreadGrowth(
  facts: LotFacts,
  rule: RuleOf<"spread_growth">,
  earlier: readonly LotSummary[],
): Flag[] {
  const tests = seriesOf(facts.traits, rule.traits, facts.platform).flatMap((s) => testsOf(s, earlier));
  const corrected = correctPValues(tests.map((t) => t.found.p), "holm");
  const grown = tests.map((test, k) => ({ test, p: corrected[k]! }))
    .filter(({ test, p }) => p < rule.alpha && Math.sqrt(test.found.ratio) >= rule.least_ratio);
  return [...Map.groupBy(grown, (g) => g.test.series.key).values()].flatMap((own) => {
    const wafers = own.filter((g) => g.test.wafer !== null);
    const lot = own.filter((g) => g.test.wafer === null);
    // Told once: of the wafers where they alone have grown, else of the lot.
    const rest = restOf(own[0]!.test.series, new Set(wafers.map((g) => g.test.wafer!)), earlier);
    const told = wafers.length > 0 && (lot.length === 0 || !(rest !== null && rest.p < rule.alpha))
      ? wafers
      : lot;
    return told.map(({ test, p }) => flagOf(facts, rule, test, p, tests.length));
  });
}

function flagOf(facts: LotFacts, rule: RuleOf<"spread_growth">, test: Test, p: number, tried: number): Flag {
  const { series, wafer, found, sd, dies, against } = test;
  const then = Math.sqrt(found.expectedVariance);
  const words = seriesWords(series);
  const unit = unitOf(series.trait);
  const own = series.dies.filter((d) => wafer === null || d.wafer === wafer);
  return {
    scope: wafer === null ? "lot" : "wafer",
    id: wafer ?? facts.lot,
    lot: facts.lot,
    rule: rule.rule,
    severity: rule.severity,
    brief: `${words} spreads ${num(sd / then, 2)} times as much as ${against}`,
    statement: `${wafer === null ? `Lot ${facts.lot}` : `Wafer ${wafer}`}: ${words} differs between dies of ${
      wafer === null ? "a" : "this"
    } wafer by ${num(sd)}${unit} (standard deviation, ${plural(dies, "die")}), ${
      num(sd / then, 2)
    } times the ${num(then)}${unit} of ${against} (variance ratio ${num(found.ratio)}, ${
      pText(p)
    }, corrected for ${plural(tried, "comparison")})`,
    evidence: {
      numbers: {
        trait: series.trait,
        sd,
        sd_expected: then,
        variance_ratio: found.ratio,
        p_value: p,
        p_value_uncorrected: found.p,
        comparisons: tried,
        reference_degrees_of_freedom: found.referenceDegrees,
      },
      readings: mergeRefs(own.flatMap((d) => d.refs)),
      dies: own.map((d) => d.unit),
    },
    suspects: wafer === null ? [] : suspectsOfDies(facts, diesOfWafers(facts, new Set([wafer]))),
  };
}
