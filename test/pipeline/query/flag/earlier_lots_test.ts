import { deepEqual, equal, match } from "node:assert/strict";
import { earlierLots, leftOut, leftOutSentences } from "../../../../pipeline/query/flag/earlier_lots.ts";
import { flagsOf, summaryOfFacts } from "../../../../pipeline/query/flag/evaluate.ts";
import type { LotSummary } from "../../../../pipeline/query/flag/facts.ts";
import { loadRules } from "../../../../pipeline/query/flag/rules.ts";
import { simulatedLot } from "./simulated_lots.ts";

const rules = (await loadRules()).filter((r) => r.kind === "lot_chart");
const made = (model: string, platform_sha256 = "p", request_sha256?: string) => ({
  model,
  platform_sha256,
  ...(request_sha256 === undefined ? {} : { request_sha256 }),
});
const lotOf = (number: number, model: string, request: string, platform = "p"): LotSummary => ({
  ...summaryOfFacts(simulatedLot(number)),
  made: made(model, platform),
  yields: new Map([["double", { good: 5, of: 10, made: made(model, platform, request) }]]),
});

Deno.test("lots made by another model, platform file or request are left out, by what differs, and it is said", () => {
  const own = lotOf(9, "4", "r");
  const all = [
    lotOf(1, "3", "r"),
    lotOf(2, "3", "r"),
    lotOf(3, "4", "r", "other"),
    lotOf(4, "4", "older"),
    lotOf(5, "4", "r"),
    own,
    lotOf(12, "4", "r"),
  ];
  const kept = earlierLots(own, all);
  deepEqual(kept.map((l) => [l.lot, l.series.size > 0, l.yields.size]), [["L004", true, 0], [
    "L005",
    true,
    1,
  ]]);
  deepEqual(leftOut(own, all).map((l) => [l.lot, l.what, l.why]), [
    ["L001", "traits", "model"],
    ["L001", "double", "model"],
    ["L002", "traits", "model"],
    ["L002", "double", "model"],
    ["L003", "traits", "platform"],
    ["L003", "double", "platform"],
    ["L004", "double", "request"],
  ]);
  const sentences = leftOutSentences(leftOut(own, all));
  equal(sentences.length, 3);
  match(
    sentences[0]!,
    /^2 earlier lots \(L001, L002\) left out for traits, yield for double: .* by model 3, this lot by model 4/,
  );
  match(
    sentences[2]!,
    /^1 earlier lot \(L004\) left out for yield for double: .* another content of the request/,
  );
});

Deno.test("a chart does not rest on lots of another model, and says why there is none", () => {
  const own = simulatedLot(40, { fault: (trait) => trait === "duty" ? 0.14 : 0 });
  const before = Array.from({ length: 12 }, (_, k) => summaryOfFacts(simulatedLot(k + 20)));
  const [same] = flagsOf(own, rules, [...before, summaryOfFacts(own)]);
  equal(same!.severity, "act");
  const older = before.map((l, k) => k < 6 ? { ...l, made: made("0") } : l);
  const flags = flagsOf(own, rules, [...older, summaryOfFacts(own)]);
  deepEqual(flags.map((f) => f.severity), ["note"]);
  match(
    flags[0]!.statement,
    /Too few lots for control charts: 6 .* need 8; 6 earlier lots .* by model 0, this lot by model 1/,
  );
});
