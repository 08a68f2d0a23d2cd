import { restoreOne } from "../../../models/decision/restore_one.ts";
import type { GainReview, MissingReading } from "../../review_types.ts";
import type { PredictionFacts, RestoredFact } from "../flag/facts.ts";
import { traitWords } from "../flag/series.ts";
import { byWafer, type DieVerdict } from "../flag/verdicts.ts";

/** Groups of traits that are put right together, as people say them. */
const GROUP_WORDS: Readonly<Record<string, string>> = {
  loss: "loss",
  mode_size: "mode sizes",
  facet: "facets",
  poling: "poling",
  phase_matching: "phase matching",
};

export const groupWords = (group: string): string => GROUP_WORDS[group] ?? group.replaceAll("_", " ");

/**
 * What the yield would be with one group of traits at its target and the others as made, and with all of them, for the lot and
 * each wafer. Dies that are accepted as made stay accepted. Empty where the prediction holds no such analysis.
 */
export function gainsOf(prediction: PredictionFacts, dies: readonly DieVerdict[], lot: string): GainReview[] {
  const { restored } = prediction.analyses;
  if (restored.length === 0) return [];
  const byDie = Map.groupBy(restored, (r) => r.die_id);
  const ready = dies.filter((d) => d.unavailable === null);
  const wafers = [...byWafer(ready)];
  return [
    gainOf("lot", lot, ready, byDie),
    ...(wafers.length < 2 ? [] : wafers.map(([wafer, own]) => gainOf("wafer", wafer, own, byDie))),
  ];
}

function gainOf(
  scope: GainReview["scope"],
  id: string,
  dies: readonly DieVerdict[],
  byDie: ReadonlyMap<string, readonly RestoredFact[]>,
): GainReview {
  const of = dies.length;
  const good = dies.filter((d) => d.decision === "accept").length;
  const groups = [...new Set([...byDie.values()].flat().map((r) => r.trait_group))];
  const counted = new Map(groups.map((group) => {
    const rows = dies.filter((d) => d.decision !== "accept")
      .flatMap((d) => byDie.get(d.die) ?? []).filter((r) => r.trait_group === group);
    return [group, {
      dies: rows.filter((r) => r.decision_restored === "accept").length,
      expected: rows.reduce((sum, r) => sum + r.probability_restored - r.probability_as_made, 0),
    }];
  }));
  const single = groups.filter((g) => g !== "all");
  const yieldOf = (group: string) => of === 0 ? 0 : (good + counted.get(group)!.dies) / of;
  const result = restoreOne({
    asMade: of === 0 ? 0 : good / of,
    allAtTarget: yieldOf("all"),
    oneAtTarget: single.map((trait) => ({ trait, yield: yieldOf(trait) })),
  });
  return {
    scope,
    id,
    dies: of,
    as_made: good,
    all_at_target: good + counted.get("all")!.dies,
    groups: result.traits.map(({ trait, yield: restored, rise, share }) => ({
      group: trait,
      words: groupWords(trait),
      dies: counted.get(trait)!.dies,
      yield: restored,
      rise,
      share,
      expected: counted.get(trait)!.expected,
    })),
    interaction: result.interaction,
    interaction_share: result.interactionShare,
    expected_all: counted.get("all")!.expected,
  };
}

const KIND_WORDS: Readonly<Record<string, string>> = {
  fringes: "a fringe reading",
  modes: "a mode reading",
  facets: "a witness reading of the coating",
  poling: "poling windows",
  tuning: "a tuning scan",
  geometry: "a geometry reading",
};

/** What dies on hold lack: the reading that would take most of their doubt, by kind, with how many it is likely to decide. */
export function missingReadings(
  { analyses, checked }: PredictionFacts,
  dies: readonly DieVerdict[],
): MissingReading[] {
  const held = new Map(
    dies.filter((d) => d.decision === "hold" && d.unavailable === null).map((d) => [d.best.guide_id, d.die]),
  );
  const first = analyses.nextReadings.filter((r) => r.place === 1 && r.reduction > 0 && held.has(r.guide_id));
  const kinds = new Map<string, { traits: Set<string>; dies: Map<string, number> }>();
  for (const r of first) {
    const kind = kinds.get(r.kind) ?? { traits: new Set(), dies: new Map() };
    kind.traits.add(traitWords(r.trait));
    kind.dies.set(r.die_id, 1 - r.p_hold);
    kinds.set(r.kind, kind);
  }
  return [...kinds].map(([kind, { traits, dies }]) => ({
    request: checked.request.request,
    kind,
    words: `${KIND_WORDS[kind] ?? kind} (${[...traits].join(", ")})`,
    dies: [...dies.keys()],
    decided: [...dies.values()].reduce((a, b) => a + b, 0),
  })).sort((a, b) => b.dies.length - a.dies.length || (a.kind < b.kind ? -1 : 1));
}
