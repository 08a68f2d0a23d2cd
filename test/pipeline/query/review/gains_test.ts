import { deepEqual, equal, match } from "node:assert/strict";
import type {
  DecisionFact,
  NextReadingFact,
  PredictionFacts,
  RestoredFact,
} from "../../../../pipeline/query/flag/facts.ts";
import { dieVerdicts } from "../../../../pipeline/query/flag/verdicts.ts";
import { gainWords } from "../../../../pipeline/query/review/gain_words.ts";
import { gainsOf, missingReadings } from "../../../../pipeline/query/review/gains.ts";
import { interactionWords } from "../../../../pipeline/review/gains_section.ts";
import { assertClose } from "../../../assert_close.ts";

type Row = readonly [die: string, decision: DecisionFact["decision"], accepted: readonly string[]];
const GROUPS = ["loss", "facet", "poling", "all"];

/** Dies with their decision, and the groups of traits with which each would be accepted. */
function predicted(rows: readonly Row[], nextReadings: readonly NextReadingFact[] = []) {
  const decisions = rows.map(([die_id, decision]): DecisionFact => ({
    guide_id: `${die_id}/g1`,
    die_id,
    wafer: die_id.split("/")[0]!,
    decision,
    probability: decision === "accept" ? 0.97 : decision === "hold" ? 0.5 : 0.02,
    limited_by: null,
    matched: true,
    unavailable: null,
  }));
  const restored = rows.filter(([, decision]) => decision !== "accept").flatMap((
    [die_id, decision, accepted],
  ) =>
    GROUPS.map((trait_group): RestoredFact => ({
      wafer: die_id.split("/")[0]!,
      die_id,
      guide_id: `${die_id}/g1`,
      trait_group,
      probability_as_made: decision === "hold" ? 0.5 : 0.02,
      probability_restored: accepted.includes(trait_group) ? 0.95 : 0.1,
      decision_as_made: decision,
      decision_restored: accepted.includes(trait_group) ? "accept" : "reject",
    }))
  );
  const prediction = {
    checked: { request: { request: "double" } },
    named: false,
    decisions,
    figures: new Map(),
    analyses: { contradictions: [], restored, nextReadings },
  } as unknown as PredictionFacts;
  return { prediction, dies: dieVerdicts(decisions) };
}

Deno.test("rises are counted per lot and wafer; shares and the interaction sum to the whole", () => {
  const { prediction, dies } = predicted([
    ["A/1", "accept", []],
    ["A/2", "reject", ["loss", "all"]],
    ["A/3", "reject", ["all"]],
    ["B/1", "reject", ["loss", "all"]],
    ["B/2", "hold", ["facet", "all"]],
    ["B/3", "reject", []],
  ]);
  const [lot, a, b] = gainsOf(prediction, dies, "L");
  deepEqual([lot!.id, a!.id, b!.id], ["L", "A", "B"]);
  deepEqual([lot!.as_made, lot!.all_at_target, lot!.dies], [1, 5, 6]);
  deepEqual(lot!.groups.map((g) => [g.words, g.dies]), [["loss", 2], ["facets", 1], ["poling", 0]]);
  assertClose(lot!.groups.reduce((sum, g) => sum + g.share!, lot!.interaction_share!), 1, { rel: 1e-12 });
  assertClose(lot!.interaction, 1 / 6, { rel: 1e-12 });
  assertClose(lot!.groups[0]!.expected, 2 * 0.93 + 2 * 0.08 - 0.4, { rel: 1e-12 });
  deepEqual(b!.groups.map((g) => g.dies), [1, 1, 0]);
  equal(
    gainWords(lot!),
    "loss at target would bring 2 more dies (3 instead of 1 of 6), the largest single rise; all traits at target bring 4 (5 of 6); " +
      "1 die of these only with several put right together",
  );
  match(interactionWords(lot!), /^1 of the dies need several put right together \(interaction 25 % /);
  match(interactionWords(b!), /add up/);
});

Deno.test("where either of two would do, or only both, or none, the words say so", () => {
  const of = (...rows: Row[]) => {
    const { prediction, dies } = predicted(rows);
    return gainsOf(prediction, dies, "L")[0]!;
  };
  const either = of(["A/1", "reject", ["loss", "facet", "all"]], ["A/2", "accept", []]);
  match(
    gainWords(either),
    /loss at target would bring 1 more die .* as many as facets; .* overlap by 1 die$/,
  );
  match(interactionWords(either), /overlap by 1 die, for which either of several would do/);
  match(
    gainWords(of(["A/1", "reject", ["all"]])),
    /^no single trait .* bring 1 \(1 of 1\): several have to be put right together/,
  );
  match(gainWords(of(["A/1", "reject", []])), /^no trait at its target would bring one more die/);
  deepEqual(gainsOf({ ...predicted([["A/1", "accept", []]]).prediction }, [], "L"), []);
});

Deno.test("what dies on hold lack is the reading worth most to each, counted by kind", () => {
  const next = (
    die_id: string,
    place: number,
    kind: string,
    trait: string,
    p_hold: number,
  ): NextReadingFact => ({
    die_id,
    guide_id: `${die_id}/g1`,
    place,
    kind,
    trait,
    wavelength_nm: null,
    polarisation: null,
    reduction: 0.1,
    p_hold,
  });
  const { prediction, dies } = predicted(
    [["A/1", "hold", []], ["A/2", "hold", []], ["A/3", "hold", []], ["A/4", "reject", []]],
    [
      next("A/1", 1, "poling", "duty", 0.25),
      next("A/1", 1, "poling", "merged", 0.25),
      next("A/1", 2, "fringes", "loss_db_cm", 0.9),
      next("A/2", 1, "poling", "duty", 0.5),
      next("A/3", 1, "fringes", "loss_db_cm", 0.5),
      next("A/4", 1, "fringes", "loss_db_cm", 0),
    ],
  );
  deepEqual(missingReadings(prediction, dies).map((m) => [m.words, m.dies, m.decided]), [
    ["poling windows (duty cycle, share of missing domains)", ["A/1", "A/2"], 1.25],
    ["a fringe reading (loss)", ["A/3"], 0.5],
  ]);
});
