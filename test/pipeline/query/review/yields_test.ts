import { deepEqual, equal, ok } from "node:assert/strict";
import type { DecisionFact } from "../../../../pipeline/query/flag/facts.ts";
import { dieVerdicts } from "../../../../pipeline/query/flag/verdicts.ts";
import { groupShares, shareOf, waferShares } from "../../../../pipeline/query/review/yields.ts";
import { assertClose } from "../../../assert_close.ts";

/** Dies with one guide each, or several when a die is named again. */
const decided = (
  rows: readonly (readonly [guide: string, decision: DecisionFact["decision"], probability: number])[],
): DecisionFact[] =>
  rows.map(([guide_id, decision, probability]) => ({
    guide_id,
    die_id: guide_id.slice(0, guide_id.lastIndexOf("/")),
    wafer: guide_id.split("/")[0]!,
    decision,
    probability,
    limited_by: null,
    matched: true,
    unavailable: null,
  }));
const dies = (wafer: string, good: number, of: number, p = 0.95) =>
  Array.from(
    { length: of },
    (_, k) => [`${wafer}/${k}/g1`, k < good ? "accept" : "reject", k < good ? p : 0.02] as const,
  );

Deno.test("a die whose guides all fail is spoken for by one that matches", () => {
  const rows = decided([["A/1/g1", "reject", 0], ["A/1/g2", "reject", 0], ["A/1/g3", "reject", 0]]);
  const matched = [false, true, true];
  const [die] = dieVerdicts(rows.map((d, k) => ({ ...d, matched: matched[k]! })));
  equal(die!.best.guide_id, "A/1/g2");
});

Deno.test("a yield has both usual intervals, as printed for 81 of 263", () => {
  // L. D. Brown, T. T. Cai, A. DasGupta, Stat. Sci. 16, 101 (2001) discuss both; R. G. Newcombe, Stat. Med. 17, 857 (1998), table I:
  // 81 of 263: score 0.2553 to 0.3662, exact 0.2527 to 0.3676 (from memory).
  const many = shareOf(dieVerdicts(decided(dies("A", 81, 263))));
  assertClose(many.score.low, 0.2553, { abs: 5e-5 });
  assertClose(many.score.high, 0.3662, { abs: 5e-5 });
  assertClose(many.exact.low, 0.2527, { abs: 5e-5 });
  assertClose(many.exact.high, 0.3676, { abs: 5e-5 });
  deepEqual([many.low, many.high, many.counted], [many.exact.low, many.exact.high, "dies"]);
  // Of two wafers the plain intervals stay, and a wider one for dies that share their wafer's fate stands beside them.
  const two = shareOf(dieVerdicts(decided([...dies("A", 9, 10), ...dies("B", 1, 10)])));
  equal(two.counted, "wafers");
  ok(two.low < two.exact.low && two.high > two.exact.high);
  ok(two.score.low > two.exact.low && two.score.high < two.exact.high, "the exact one is the wider");
});

Deno.test("the number expected is the sum of probabilities; its range widens where a wafer's dies go together", () => {
  const { expected } = shareOf(
    dieVerdicts(decided(Array.from({ length: 20 }, (_, k) => [`A/${k}/g1`, "hold", 0.5]))),
  );
  equal(expected!.dies, 10);
  // Binomial with n = 20, p = 1/2: P(K ≤ 5) = 0.0207, P(K ≤ 6) = 0.0577; the 2.5 % quantiles are 6 and 14.
  deepEqual([expected!.low, expected!.high], [6, 14]);
  // Together all twenty are good or none is: standard deviation 10.
  deepEqual([expected!.together_low, expected!.together_high], [0, 20]);
  const sure = shareOf(dieVerdicts(decided([["A/1/g1", "accept", 1], ["A/2/g1", "reject", 0]]))).expected!;
  deepEqual(Object.values(sure), [1, 1, 1, 1, 1]);
  equal(shareOf([]).expected, null);
  equal(shareOf([]).value, null);
});

Deno.test("what can't be shipped is in no yield and in no expectation", () => {
  const facts = decided([["A/1/g1", "accept", 0.9], ["A/2/g1", "reject", 0.9]]);
  const share = shareOf(dieVerdicts([facts[0]!, { ...facts[1]!, unavailable: "cut" }]));
  deepEqual([share.good, share.of, share.expected!.dies], [1, 1, 0.9]);
});

Deno.test("a group's yield counts the dies that have its guides, each by its best guide of that group", () => {
  const facts = decided([
    ["A/1/a1", "accept", 0.95],
    ["A/1/b1", "reject", 0.01],
    ["A/2/a1", "reject", 0.02],
    ["A/2/a2", "hold", 0.6],
    ["B/1/b1", "accept", 0.92],
    ["B/1/x1", "accept", 0.99],
  ]);
  const groups = groupShares(facts, (guide) => {
    const group = guide.split("/")[2]![0]!;
    return group === "x" ? null : group;
  });
  deepEqual(groups.map((g) => [g.group, g.good, g.hold, g.of]), [["a", 1, 1, 2], ["b", 1, 0, 2]]);
  assertClose(groups[0]!.expected!.dies, 1.55, { rel: 1e-12 });
  deepEqual(waferShares(dieVerdicts(facts)).map((w) => [w.wafer, w.good, w.of]), [["A", 1, 2], ["B", 1, 1]]);
});
