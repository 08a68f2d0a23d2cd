import { equal, ok } from "node:assert/strict";
import { runSignals, WESTERN_ELECTRIC } from "../../../../models/decision/charts/mod.ts";
import { flagsOf, summaryOfFacts } from "../../../../pipeline/query/flag/evaluate.ts";
import type { LotSummary } from "../../../../pipeline/query/flag/facts.ts";
import { correctedZ, lotCharts } from "../../../../pipeline/query/flag/lot_chart.ts";
import { waferCharts } from "../../../../pipeline/query/flag/wafer_chart.ts";
import { loadRules, type RuleOf } from "../../../../pipeline/query/flag/rules.ts";
import { individualsCharts } from "../../../../models/decision/charts/mod.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { simulatedLot } from "./simulated_lots.ts";

/** Fault-free lots judged, after those that the first charts rest on. */
const LOTS = 240;
const BEFORE = 20;

const rules = await loadRules();
const chart = rules.find((r) => r.kind === "lot_chart") as RuleOf<"lot_chart">;

Deno.test("fault-free lots raise no more alarms than the rules promise", () => {
  const summaries: LotSummary[] = [];
  let [act, watch, charts, signals, wafers, wafersOut] = [0, 0, 0, 0, 0, 0];
  const byRule = new Map<string, number>();
  for (let n = 1; n <= BEFORE + LOTS; n++) {
    const facts = simulatedLot(n);
    summaries.push(summaryOfFacts(facts));
    if (n <= BEFORE) continue;
    const flags = flagsOf(facts, rules, summaries).filter((f) => f.severity !== "note");
    if (flags.some((f) => f.severity === "act")) act++;
    if (flags.some((f) => f.severity === "watch")) watch++;
    for (const f of flags) byRule.set(f.rule, (byRule.get(f.rule) ?? 0) + 1);
    const own = lotCharts(summaries.at(-1)!, summaries, chart);
    // The limits shown are those that judge.
    for (const c of own) {
      const [x, z] = [c.values.at(-1)!, c.z.at(-1)!];
      equal(
        x > c.upper || x < c.lower,
        Math.abs(z) > 3,
        `${c.words}: ${x} in ${c.lower} to ${c.upper}, z ${z}`,
      );
    }
    charts += own.length;
    signals += own.filter((c) => c.signals.length > 0).length;
    for (const { z } of waferCharts(summaries.at(-1)!, summaries, chart).flatMap((c) => c.points)) {
      if (z === null) continue;
      wafers++;
      if (Math.abs(z) > 3) wafersOut++;
    }
  }
  // What the four run rules promise: the share of points of a long series in control, judged by its true centre and
  // spread, at which some rule signals (one signal in 91.75 points begins a run of them).
  const random = randomFrom("in control");
  const z = Array.from({ length: 200_000 }, () => random.normal());
  const promised = new Set(runSignals(z, WESTERN_ELECTRIC).map((s) => s.at)).size / z.length;
  const found = signals / charts;
  // Signals of neighbouring points go together, so the count scatters more than independent ones: twice the binomial.
  const most = promised + 3 * 2 * Math.sqrt(promised * (1 - promised) / charts);
  const shares = `act ${act}, watch ${watch} of ${LOTS} lots; charts ${signals} of ${charts} points, ${
    (100 * found).toFixed(2)
  } %, promised ${(100 * promised).toFixed(2)} %; by rule ${JSON.stringify([...byRule])}`;
  // Found: no lot to be decided, 15 of 240 to be looked at; 1.56 % of chart points where 1.66 % are promised.
  ok(charts === 4 * LOTS, shares);
  ok(found > 0 && found < most, shares);
  // 0.27 % of wafers; those of a lot go together, so the count scatters as half as many: 5.2 ± 3.2 of 1920.
  equal(wafers, 2 * 4 * LOTS);
  ok(wafersOut <= 0.0027 * wafers + 3 * Math.sqrt(2 * 0.0027 * wafers), `${wafersOut} of ${wafers} wafers`);
  // At most what the charts of 4 traits and 2 wafers each and the spread rule promise together.
  ok(watch / LOTS <= 4 * promised + 8 * 0.0027 + 0.01, shares);
  // Limits of traits lie 2 or 3 u of the platform out, which is over 3 standard deviations of a lot: 0.3 % per trait and
  // side at most, and only beyond the confidence of the wafer's mean.
  const limits = ["loss-high", "duty-off", "duty-uneven", "titanium-off"].reduce(
    (s, r) => s + (byRule.get(r) ?? 0),
    0,
  );
  ok(limits <= 0.01 * LOTS, shares);
  ok((byRule.get("wafer-out") ?? 0) <= 0.005 * 4 * LOTS, shares);
  // At most alpha = 1 % of lots, however many wafers and traits are compared; 3 standard deviations of the count.
  ok((byRule.get("spread-grown") ?? 0) <= 0.01 * LOTS + 3 * Math.sqrt(0.01 * LOTS), shares);
  // The whole promise: no lot to be decided.
  equal(act, 0, shares);
});

Deno.test("a point judged by limits from few lots is not out more often than one judged by known limits", () => {
  const random = randomFrom("few lots");
  for (const n of [8, 12, 20]) {
    const trials = 40_000;
    let [beyond3, beyond2, plain] = [0, 0, 0];
    for (let k = 0; k < trials; k++) {
      const values = Array.from({ length: n + 1 }, () => random.normal());
      const z = individualsCharts(values, { baseline: n }).individuals.points[n]!.z;
      if (Math.abs(z) > 3) plain++;
      const judged = Math.abs(correctedZ(z, n));
      if (judged > 3) beyond3++;
      if (judged > 2) beyond2++;
    }
    // P(|Z| > 3) = 0.27 %, P(|Z| > 2) = 4.55 %: not more often, and not so seldom that nothing is found.
    const [p3, p2] = [beyond3 / trials, beyond2 / trials];
    const text = `n ${n}: ${p3} beyond 3, ${p2} beyond 2, plainly ${plain / trials} beyond 3`;
    ok(p3 < 0.0027 && p3 > 0.0027 / 5, text);
    ok(p2 < 1.1 * 0.0455 && p2 > 0.7 * 0.0455, text);
    if (n === 8) ok(plain / trials > 4 * 0.0027, "plain limits would alarm several times as often");
  }
});
