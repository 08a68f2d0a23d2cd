import { deepEqual, equal, match, ok, rejects } from "node:assert/strict";
import { flagsOf, summaryOfFacts } from "../../../../pipeline/query/flag/evaluate.ts";
import type { DecisionFact, FigureFact, LotFacts } from "../../../../pipeline/query/flag/facts.ts";
import { type DieVerdict, lotYield } from "../../../../pipeline/query/flag/verdicts.ts";
import { loadRules, type Rule } from "../../../../pipeline/query/flag/rules.ts";
import type { TraitRow } from "../../../../pipeline/traits/trait_row.ts";
import { type CheckedRequest, checkRequest, requestSchema } from "../../../../shared/schemas/request.ts";
import { InputError } from "../../../../shared/errors.ts";
import { assertClose } from "../../../assert_close.ts";
import { simulatedLot, SOURCE } from "./simulated_lots.ts";

const rules = await loadRules();
const only = (...names: string[]): Rule[] => rules.filter((r) => names.includes(r.rule));

const REQUEST = checkRequest(requestSchema.parse({
  request: "double",
  process: "second-harmonic",
  polarisations: { pump: "TM", signal: "TM", idler: "TM" },
  signal: { wavelength_nm: 1550, average_power_mw: 10 },
  oven_c: [20, 120],
  require: [{ figure: "efficiency_percent_per_w", at_least: 80 }],
})) as CheckedRequest;

const NO_ANALYSES = { contradictions: [], restored: [], nextReadings: [] };

/** Predictions of a lot, guide by guide. */
function predicted(
  facts: LotFacts,
  decide: (die: string, guide: string) => Partial<DecisionFact>,
  figure: Partial<FigureFact> = {},
): LotFacts {
  const decisions = facts.design.guides.map((g): DecisionFact => ({
    guide_id: g.guide_id,
    die_id: g.die_id,
    wafer: g.wafer,
    decision: "accept",
    probability: 1,
    limited_by: null,
    matched: true,
    unavailable: null,
    ...decide(g.die_id, g.guide_id),
  }));
  const value: FigureFact = {
    mean: 100,
    u: 2,
    lo: 96,
    hi: 104,
    probability: 1,
    basis: "wafer",
    reason: null,
    ...figure,
  };
  const figures = new Map(
    facts.design.guides.map((g) => [g.guide_id, new Map([["efficiency_percent_per_w", value]])]),
  );
  return {
    ...facts,
    predictions: [{ checked: REQUEST, named: false, decisions, figures, analyses: NO_ANALYSES }],
  };
}

Deno.test("a lossy wafer is flagged with its numbers and lines, and the one step that differs is suspected", () => {
  const facts = simulatedLot(1, {
    wafers: 6,
    fault: (trait, g) => trait === "loss_db_cm" && g.wafer.endsWith("-2") ? 0.6 : 0,
    steps: (wafer) => [
      ["titanium", "evap-1", "R1"],
      ["diffusion", wafer.endsWith("-2") ? "furnace-3" : "furnace-1", wafer.endsWith("-2") ? "D7" : "D4"],
      ["poling", wafer.endsWith("-1") ? "hv-2" : "hv-1", "P2"],
    ],
  });
  const [flag, ...more] = flagsOf(facts, only("loss-high", "wafer-out"), []);
  deepEqual(more, [], "told once: beyond the limit and unlike its twins are one finding");
  equal(flag!.id, "L001-2");
  equal(flag!.severity, "act");
  match(
    flag!.statement,
    /^Wafer L001-2: loss at 1550 nm TM is 0\.[78]\d* dB\/cm .* above the platform's 0\.2 \+ 3 × 0\.06 dB\/cm/,
  );
  deepEqual(flag!.evidence.readings.map((r) => [r.file_name, r.lines]), [["readings/x.csv", [[2, 2]]]]);
  const [suspect] = flag!.suspects;
  deepEqual([suspect!.step, suspect!.tool, suspect!.recipe], ["diffusion", "furnace-3", "D7"]);
  equal(suspect!.compared, "1 of 6 wafers");
  // Dealt among six wafers, of which one is affected: 1/6 by chance, however many dies it has.
  assertClose(suspect!.p_value_uncorrected, 1 / 6, { rel: 1e-12 });
  ok(suspect!.p_value_dies < 1e-6, "counted die by die it would look like proof");
  equal(suspect!.only_difference, true);
});

Deno.test("two steps that the same wafers carried can't be told apart, and it is said", () => {
  const bad = ["L002-1", "L002-2", "L002-3"];
  const facts = simulatedLot(2, {
    wafers: 9,
    fault: (trait, g) => trait === "duty" && bad.includes(g.wafer) ? 0.15 : 0,
    steps: (wafer) => [
      ["clean", bad.includes(wafer) ? "bench-2" : "bench-1", "C1"],
      ["poling", "hv-1", bad.includes(wafer) ? "P9" : "P2"],
      ["dicing", "saw-1", "S1"],
    ],
  });
  const flags = flagsOf(facts, only("duty-off"), []);
  deepEqual(flags.map((f) => f.id), bad);
  const suspects = flags[0]!.suspects.filter((s) => s.p_value < 0.05);
  deepEqual(suspects.map((s) => s.step).sort(), ["clean", "poling"]);
  for (const s of suspects) {
    equal(s.verdict, "suspect");
    equal(s.only_difference, false);
    equal(s.same_as.length, 1);
    // 3 of 9 wafers dealt out by chance: 1/C(9,3); two hypotheses are one, its opposite another.
    assertClose(s.p_value_uncorrected, 1 / 84, { rel: 1e-9 });
    assertClose(s.p_value, 2 / 84, { rel: 1e-9 });
  }
});

Deno.test("a wafer unlike its twins within the limits is watched", () => {
  const facts = simulatedLot(3, {
    wafers: 3,
    fault: (trait, g) => trait === "titanium_nm" && g.wafer.endsWith("-3") ? 3.5 : 0,
  });
  const flags = flagsOf(facts, only("titanium-off", "wafer-out"), []);
  deepEqual(flags.map((f) => [f.id, f.rule, f.severity]), [["L003-3", "wafer-out", "watch"]]);
  // Beside a wafer that is beyond its limit its good twins are not out.
  const far = simulatedLot(3, {
    wafers: 3,
    fault: (trait, g) => trait === "titanium_nm" && g.wafer.endsWith("-3") ? 12 : 0,
  });
  deepEqual(flagsOf(far, only("titanium-off", "wafer-out"), []).map((f) => [f.id, f.rule]), [
    ["L003-3", "titanium-off"],
  ]);
});

Deno.test("a lot that steps out of line with its forerunners is flagged; too few forerunners are said, not charted", () => {
  const lots = Array.from({ length: 12 }, (_, k) => simulatedLot(k + 20));
  const shifted = simulatedLot(40, { fault: (trait) => trait === "duty" ? 0.14 : 0 });
  const summaries = [...lots, shifted].map(summaryOfFacts);
  const flags = flagsOf(shifted, only("lot-chart"), summaries);
  const duty = flags.find((f) => f.brief.startsWith("duty cycle"))!;
  equal(duty.scope, "lot");
  deepEqual(duty.evidence.readings.map((r) => r.file_name), ["readings/x.csv"]);
  equal(duty.severity, "act");
  match(
    duty.statement,
    /the 12 lots before have 0\.\d+ on average, limits .*: one point beyond 3 standard deviations/,
  );
  // Both wafers are out as the lot is: told once.
  deepEqual(flags.filter((f) => f.scope === "wafer"), []);
  const one = simulatedLot(41, {
    fault: (trait, g) => trait === "duty" && g.wafer.endsWith("-2") ? 0.14 : 0,
  });
  const wafer = flagsOf(one, only("lot-chart"), [...summaries.slice(0, -1), summaryOfFacts(one)])
    .find((f) => f.scope === "wafer")!;
  deepEqual([wafer.id, wafer.severity], ["L041-2", "watch"]);
  match(
    wafer.statement,
    /^Wafer L041-2: duty cycle is 0\.6\d+ on average of 10 dies; wafers of the 12 lots before have 0\.\d+, limits .*: one wafer beyond 3/,
  );
  const [few, ...none] = flagsOf(shifted, only("lot-chart"), summaries.slice(-4));
  deepEqual(none, []);
  equal(few!.severity, "note");
  match(few!.statement, /Too few lots for control charts: 3 of platform invented before L040, need 8/);
  const [undated] = flagsOf({ ...shifted, started: null }, only("lot-chart"), []);
  match(undated!.statement, /no start date/);
});

Deno.test("dies that differ more than before are watched, at the wafer if it is one wafer's and at the lot if it is all", () => {
  const lots = Array.from({ length: 6 }, (_, k) => simulatedLot(k + 60));
  const wild = (where: (wafer: string) => boolean, step = 0.15) =>
    simulatedLot(70, {
      wafers: 3,
      fault: (trait, g) => trait === "loss_db_cm" && where(g.wafer) && /[14]$/.test(g.die_id) ? step : 0,
    });
  const flagged = (lot: LotFacts, before = lots) =>
    flagsOf(lot, only("spread-grown"), [...before, lot].map(summaryOfFacts));
  const [whole, ...none] = flagged(wild(() => true));
  deepEqual(none, []);
  deepEqual([whole!.scope, whole!.id], ["lot", "L070"]);
  match(
    whole!.statement,
    /loss at 1550 nm TM differs between dies of a wafer by 0\.\d+ dB\/cm .* times the 0\.\d+ dB\/cm of the 6 lots before .*corrected for 12 comparisons/,
  );
  const [one, ...others] = flagged(wild((wafer) => wafer.endsWith("-2")));
  deepEqual(others, []);
  deepEqual([one!.scope, one!.id, one!.severity], ["wafer", "L070-2", "watch"]);
  match(one!.statement, /^Wafer L070-2: .* of the lot's other wafers and the 6 lots before/);
  // Without any lot before, the siblings alone still tell a wafer that spreads four times as much.
  deepEqual(flagged(wild((wafer) => wafer.endsWith("-2"), 0.3), []).map((f) => f.id), ["L070-2"]);
  deepEqual(flagged(lots[5]!, lots.slice(0, 5)), []);
});

Deno.test("a yield is flagged when its whole interval lies below the floor, and only noted when not", () => {
  const lot = simulatedLot(4, { wafers: 2, dies: 10 });
  const reject = { decision: "reject", probability: 0, limited_by: "efficiency_percent_per_w" } as const;
  const none = predicted(lot, (die) => die.startsWith("L004-2") ? reject : {});
  const [flag, ...rest] = flagsOf(none, only("yield-low"), []);
  deepEqual(rest, []);
  equal(flag!.severity, "act");
  // Clopper & Pearson (1934): none of 10 with 95 % one-sided confidence is below 1 − 0.05^(1/10) = 25.9 %.
  assertClose(flag!.evidence.numbers.upper_bound as number, 1 - 0.05 ** 0.1, { rel: 1e-9 });
  match(
    flag!.statement,
    /0 of 10 dies accepted for double .*limited by efficiency_percent_per_w.*; the floor is 50 %/,
  );
  const four = predicted(lot, (die) => /L004-2\/0[1-6]/.test(die) ? reject : {});
  deepEqual(flagsOf(four, only("yield-low"), []).map((f) => f.severity), ["note"]);
  // Dies that can't be shipped are no part of a yield.
  const cut = predicted(lot, (die) => die.startsWith("L004-2") ? { ...reject, unavailable: "cut" } : {});
  deepEqual(flagsOf(cut, only("yield-low"), []), []);
});

Deno.test("dies of one wafer are no independent units of a lot's yield", () => {
  const die = (wafer: string, k: number, decision: "accept" | "reject") =>
    ({ die: `${wafer}/${k}`, wafer, decision, unavailable: null }) as unknown as DieVerdict;
  const apart = [...Array(10).keys()].flatMap((k) => [die("a", k, "accept"), die("b", k, "reject")]);
  const mixed = ["a", "b", "c", "d", "e", "f"].flatMap((w) =>
    [...Array(10).keys()].map((k) => die(w, k, k % 2 === 0 ? "accept" : "reject"))
  );
  const [wide, narrow] = [lotYield(apart, 0.95), lotYield(mixed, 0.95)];
  equal(wide.value, 0.5);
  ok(wide.high - wide.low > 0.99, "two wafers that differ wholly say nothing of a third");
  ok(narrow.low > 0.25 && narrow.high < 0.75, "six wafers that agree do");
});

Deno.test("a group that matches nowhere is blamed on the mask", () => {
  const lot = simulatedLot(5);
  const guides = lot.design.guides.map((g) =>
    g.guide_id.endsWith("g4") ? { ...g, group: "D", period_um: 16 } : g
  );
  const design = {
    ...lot.design,
    guides,
    guideById: new Map(guides.map((g) => [g.guide_id, g])),
    guidesOfDie: Map.groupBy(guides, (g) => g.die_id),
  };
  const facts = predicted({ ...lot, design }, (_, guide) => ({ matched: !guide.endsWith("g4") }));
  const [flag] = flagsOf(facts, only("no-match"), []);
  match(
    flag!.statement,
    /none of the 20 guides of group D matches .* period is 16 µm, guides that match have 17 µm/,
  );
  equal(flag!.suspects[0]!.kind, "group");
  equal(flag!.suspects[0]!.name, "D");
  ok(flag!.suspects[0]!.p_value < 1e-6);
  deepEqual(flagsOf(predicted(lot, () => ({})), only("no-match"), []), []);
});

/** A lot with its first two dies under another coating run. */
function coated(reflectivity: number): LotFacts {
  const lot = simulatedLot(6, { wafers: 1, dies: 8 });
  const dies = [...lot.design.guidesOfDie.keys()];
  const coatings = dies.flatMap((die_id, k) =>
    (["in", "out"] as const).map((facet) => ({
      ...SOURCE,
      file_name: "lot.json",
      die_id,
      facet,
      coating_run: facet === "out" && k < 2 ? "C9" : facet === "out" ? "C2" : "C1",
      entry: 1,
    }))
  );
  const witness = (unit: string, value: number, line: number): TraitRow => ({
    trait: "reflectivity",
    scope: "coating_run",
    unit,
    wafer: null,
    die_id: null,
    guide_id: null,
    width_um: null,
    wavelength_nm: unit.endsWith("in") ? 1550 : 775,
    polarisation: null,
    process: null,
    value,
    u: 0.002,
    u_from: "stated",
    method: "witness reflectivity",
    readings: [{
      table: "facets",
      file_name: "readings/facets.csv",
      source_file: SOURCE.source_file,
      lines: [[line, line]],
    }],
    detail: null,
  });
  const traits = [
    ...lot.traits,
    witness("C1|in", 0.01, 2),
    witness("C2|out", 0.012, 3),
    witness("C9|out", reflectivity, 4),
  ];
  return predicted({ ...lot, coatings, traits }, () => ({}));
}

Deno.test("a coating run off its target is found by its own witness, at the wavelengths that leave by its facet", () => {
  const [flag, ...none] = flagsOf(coated(0.4), only("coating-off", "coating-unknown"), []);
  deepEqual(none, []);
  deepEqual([flag!.scope, flag!.id, flag!.severity], ["coating_run", "C9", "act"]);
  match(
    flag!.statement,
    /C9, out facet: it turns back 40 % at 775 nm for double .* limit is 4\.\d+ %\. It is on 2 dies/,
  );
  deepEqual(flag!.evidence.readings[0]!.lines, [[4, 4]]);
  equal(flag!.suspects[0]!.name, "C9|out");
  ok(flag!.suspects[0]!.p_value < 1e-6);
  // A little too much is watched; within three u it is in line.
  deepEqual(flagsOf(coated(0.06), only("coating-off"), []).map((f) => f.severity), ["watch"]);
  deepEqual(flagsOf(coated(0.039), only("coating-off"), []), []);
});

Deno.test("readings, outcomes and records that contradict each other are flagged where they stand", () => {
  const lot = simulatedLot(7);
  const first = lot.traits.find((t) => t.trait === "loss_db_cm")!;
  const again = { ...first, value: first.value + 0.5, method: "cut-back line" };
  const guide = lot.design.guides[0]!;
  const facts = predicted({
    ...lot,
    traits: [...lot.traits, again],
    periods: [{
      wafer: guide.wafer,
      units: [guide.guide_id],
      drawn_um: 17,
      ratio: 16.5 / 17,
      u_ratio: 0.01 / 17,
      from: "walls",
      count: 2100,
      readings: [],
    }],
    reduceRemarks: [{
      code: "cutback_outlier",
      unit: guide.guide_id,
      statement:
        `${guide.guide_id} at 1550 nm TM: 3 dB at 10 mm (readings/cutback.csv:36) is off the line; it is kept`,
    }],
    outcomes: [
      {
        ...SOURCE,
        unit: guide.guide_id,
        guide_id: guide.guide_id,
        die_id: guide.die_id,
        request: "double",
        figure: "efficiency_percent_per_w",
        value: 70,
        u_value: 4,
      },
      {
        ...SOURCE,
        unit: guide.guide_id,
        guide_id: guide.guide_id,
        die_id: guide.die_id,
        request: "double",
        figure: "efficiency_percent_per_w",
        value: 112,
        u_value: 4,
      },
    ],
    quarantine: [{
      ...SOURCE,
      source_line: 9,
      kind: "x",
      column: "value",
      value: "NaN",
      reason: "the cell is not a number (NaN)",
      wanted: "a number",
    }],
  }, (die) => die === guide.die_id ? { unavailable: "cut back to 5 mm of 18 mm" } : {});
  const names = [
    "readings-disagree",
    "reading-doubted",
    "outcome-off",
    "rows-aside",
    "record-missing",
    "period-off",
  ];
  const flags = new Map(flagsOf(facts, only(...names), []).map((f) => [f.rule, f]));
  deepEqual([...flags.keys()].sort(), [...names].sort());
  deepEqual(flags.get("reading-doubted")!.evidence.readings.map((r) => [r.file_name, r.lines]), [[
    "readings/cutback.csv",
    [[36, 36]],
  ]]);
  // 3·√(2² + 4²) = 13.4: 70 is off 100, 112 is not.
  match(
    flags.get("outcome-off")!.statement,
    /found efficiency_percent_per_w = 70 %\/W ± 4 for double, predicted was 100 ± 2/,
  );
  match(flags.get("rows-aside")!.statement, /1 of 1000 rows/);
  match(flags.get("period-off")!.statement, /has 16\.5 µm .* drawn 17 µm/);
});

Deno.test("the same finding on many units of a wafer is told once, with the first of them", () => {
  const lot = simulatedLot(13);
  const guides = lot.design.guides.filter((g) => g.wafer === "L013-1").slice(0, 6);
  const remarks = guides.map((g, k) => ({
    code: "cutback_outlier",
    unit: g.guide_id,
    statement: `${g.guide_id}: 3 dB at 10 mm (readings/cutback.csv:${
      10 + 2 * k
    }) is off the line; it is kept`,
  }));
  const cut = new Set(guides.map((g) => g.die_id).concat("L013-1/07", "L013-1/08", "L013-1/09"));
  const facts = predicted(
    { ...lot, reduceRemarks: remarks },
    (die) => cut.has(die) ? { unavailable: "cut back to 5 mm" } : {},
  );
  const flags = flagsOf(facts, only("reading-doubted", "record-missing"), []);
  deepEqual(flags.map((f) => [f.rule, f.id]), [["reading-doubted", "L013-1"], ["record-missing", "L013-1"]]);
  match(
    flags[0]!.statement,
    /^L013-1: cutback outlier on 6 units, such as L013-1\/01\/g1: .*; and 3 more findings/,
  );
  deepEqual(flags[0]!.evidence.guides, guides.map((g) => g.guide_id));
  deepEqual(flags[0]!.evidence.readings[0]!.lines.map(([a]) => a), [10, 12, 14, 16, 18, 20]);
  match(flags[1]!.statement, /^Wafer L013-1: 5 dies were cut, such as L013-1\/01 \(cut back to 5 mm\)/);
  const few = { ...lot, reduceRemarks: remarks.slice(0, 3) };
  equal(flagsOf(few, only("reading-doubted"), []).length, 3);
});

Deno.test("a reading that the others contradict is named by file and line, once, with the numbers", () => {
  const facts = predicted(simulatedLot(12), () => ({}));
  const contradiction = {
    trait: "loss_db_cm",
    wavelength_nm: 1550.2,
    polarisation: "TM" as const,
    process: null,
    unit: "L012-1/03/g1",
    value: 0.94,
    expected: 0.213,
    u_expected: 0.041,
    standardised: 17.7,
    p: 1e-9,
    readings: [{
      table: "cutback",
      file_name: "readings/cutback.csv",
      source_file: SOURCE.source_file,
      lines: [[31, 33], [40, 40]] as const,
    }],
  };
  const [of] = facts.predictions;
  const other = { ...contradiction, wavelength_nm: 1549.9, p: 1e-8 };
  const twice = { ...of!, analyses: { ...NO_ANALYSES, contradictions: [contradiction, other] } };
  const [flag, ...none] = flagsOf({ ...facts, predictions: [twice] }, only("contradiction"), []);
  deepEqual(none, [], "told once for both requests' wavelengths");
  deepEqual([flag!.scope, flag!.id, flag!.severity], ["wafer", "L012-1", "watch"]);
  equal(
    flag!.statement,
    "L012-1/03/g1: its loss at 1550 nm TM was read as 0.94 dB/cm (readings/cutback.csv:31–33, 40); the other readings " +
      "lead one to expect 0.213 ± 0.041 dB/cm, 18 times that u away (p < 0.0001); it stays in use until it is read again or taken out",
  );
  deepEqual(flag!.evidence.readings[0]!.lines, [[31, 33], [40, 40]]);
  deepEqual(flagsOf(facts, only("contradiction"), []), []);
});

Deno.test("scans that all lie on one side speak about the platform file", () => {
  const lot = simulatedLot(8);
  const scan = (k: number, value: number): TraitRow => ({
    ...lot.traits[0]!,
    trait: "mismatch_offset_per_m",
    unit: lot.design.guides[k]!.guide_id,
    process: "TM>TM+TM",
    value,
    u: 1,
  });
  const of = (values: number[]) =>
    flagsOf({ ...lot, traits: values.map((v, k) => scan(k, v)) }, only("scan-residual"), []);
  deepEqual(of([-120, 90, 40, -60]), []);
  deepEqual(of([900, 1000]), [], "two scans are too few");
  deepEqual(
    of([900, 1000, 1100]).map((f) => f.severity),
    ["note"],
    "within the 5000 1/m that the platform states",
  );
  deepEqual(of([19_000, 20_000, 21_000]).map((f) => f.severity), ["watch"]);
});

Deno.test("what can't be decided for want of readings is noted with what it rests on", () => {
  const hold = { decision: "hold", probability: 0.5, limited_by: "efficiency_percent_per_w" } as const;
  const facts = predicted(simulatedLot(9), () => hold, { basis: "platform" });
  const [flag] = flagsOf(facts, only("coverage-thin"), []);
  equal(flag!.severity, "note");
  match(
    flag!.statement,
    /20 of 20 dies can't be decided for double.*efficiency_percent_per_w on its platform's default \(20\)/,
  );
  deepEqual(
    flagsOf(predicted(simulatedLot(9), () => hold, { basis: "measured" }), only("coverage-thin"), []),
    [],
  );
});

Deno.test("a user's rules stand beside the program's, replace namesakes and silence", async () => {
  const file = await Deno.makeTempFile({ suffix: ".json" });
  try {
    const write = (list: unknown) => Deno.writeTextFile(file, JSON.stringify({ rules: list }));
    await write([
      {
        rule: "loss-high",
        kind: "trait_limit",
        trait: "loss_db_cm",
        at_most: 0.1,
        confidence: 0.9,
        severity: "watch",
      },
      { rule: "yield-low", kind: "quarantine", off: true, watch_above_share: 0, severity: "note" },
      {
        rule: "strong",
        kind: "figure_limit",
        figure: "efficiency_percent_per_w",
        at_most: 90,
        share_beyond: 0.2,
        confidence: 0.95,
        severity: "act",
      },
    ]);
    const own = await loadRules(file);
    equal(own.find((r) => r.rule === "yield-low"), undefined);
    equal(own.length, rules.length);
    const facts = predicted(simulatedLot(10), () => ({}));
    const flags = flagsOf(facts, own.filter((r) => r.rule === "loss-high" || r.rule === "strong"), []);
    deepEqual(flags.map((f) => [f.id, f.rule, f.severity]), [
      ["L010-1", "strong", "act"],
      ["L010-2", "strong", "act"],
      ["L010-1", "loss-high", "watch"],
      ["L010-2", "loss-high", "watch"],
    ]);
    match(
      flags[0]!.statement,
      /efficiency_percent_per_w of 10 of 10 dies is beyond at most 90 %\/W for double/,
    );
    await write([{
      rule: "x",
      kind: "trait_limit",
      trait: "loss",
      at_most: 1,
      confidence: 0.9,
      severity: "act",
    }]);
    await rejects(
      loadRules(file),
      (e: InputError) => e instanceof InputError && /rules\[0\]\.trait/.test(e.message),
    );
    await write([
      { rule: "loss-high", off: true },
      { rule: "yield-low", floor: 0.8 },
    ]);
    const changed = await loadRules(file);
    equal(changed.find((r) => r.rule === "loss-high"), undefined);
    deepEqual(changed.find((r) => r.rule === "yield-low"), {
      ...rules.find((r) => r.rule === "yield-low")!,
      floor: 0.8,
    });
    for (
      const [entry, why] of [
        [
          { rule: "loss-hihg", off: true },
          /rules\[0\]\.rule: .* \(did you mean "loss-high"\?\).*found "loss-hihg"/,
        ],
        [{ rule: "yield-low", floorr: 1 }, /rules\[0\]: unknown key "floorr" \(did you mean "floor"\?\)/],
        [{ rule: "yield-low", floor: 80 }, /rules\[0\]\.floor: .*<=1 \(found "80"\)/],
        [
          { rule: "x", kind: "yield_flor" },
          /rules\[0\]\.kind: found "yield_flor", need one of .*yield_floor/,
        ],
        [{ rule: "rows-aside", severity: "bad" }, /rules\[0\]\.severity: .*"act"\|"watch"\|"note"/],
      ] as const
    ) {
      await write([entry]);
      await rejects(loadRules(file), (e: InputError) => {
        match(e.message, why);
        return e.message.includes(file);
      });
    }
    await write([{ rule: "x", kind: "trait_limit", trait: "loss_db_cm", confidence: 0.9, severity: "act" }]);
    await rejects(loadRules(file), /need at least one of at_least/);
  } finally {
    await Deno.remove(file);
  }
});
