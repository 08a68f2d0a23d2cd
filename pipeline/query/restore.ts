import { type ExpectedYield, expectedYield } from "../../models/decision/yields.ts";
import { type RestoreOne, restoreOne } from "../../models/decision/restore_one.ts";
import { RESTORE_GROUP_NAMES } from "../../models/decision/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Ledger } from "../ledger/mod.ts";
import type { Engine } from "./engine.ts";
import { RANKED_FROM, rankIn } from "./rank.ts";
import { engineWith } from "./sql.ts";

/** Yield of some dies, as made or with traits at their targets. */
export interface RestoredYield {
  /** Dies accepted. */
  readonly accepted: number;
  /** Sum of probabilities, with its spreads. */
  readonly expected: ExpectedYield;
}

/** What each group of traits at its target would bring the dies of a lot or a wafer. */
export interface RestoreOneGroup {
  /** Id of the lot or wafer. */
  readonly unit: string;
  /** Dies that can be shipped. */
  readonly dies: number;
  /** Of them those that are not accepted and were predicted again. */
  readonly restored_dies: number;
  readonly as_made: RestoredYield;
  readonly all_at_target: RestoredYield;
  readonly at_target: readonly ({ readonly trait_group: string } & RestoredYield)[];
  /** Rises of the expected yield (0…1) and their shares of the whole rise, largest first. */
  readonly by_expectation: RestoreOne;
  /** The same for the share of dies that are accepted. */
  readonly by_count: RestoreOne;
}

/** What a restoration reads. */
export const RESTORED_FROM: readonly string[] = [...RANKED_FROM, "restored"];

interface RestoredDie {
  readonly group: string;
  readonly made: number;
  readonly probability: number;
  readonly accepted: boolean;
}

/**
 * Yields of one lot's dies for a request with one group of traits at a time at its target, and with all. A die is what its
 * best guide is; an accepted die stays as it is, since nothing had to be put right about it.
 */
export async function restoreOneOf(
  ledger: Ledger,
  checked: CheckedRequest,
  lot: string,
  by: "lot" | "wafer" = "lot",
): Promise<RestoreOneGroup[]> {
  using engine = await engineWith(ledger, RESTORED_FROM, { lots: [lot] });
  return await restoreOneIn(engine, checked, lot, by);
}

/** The same from an engine that holds {@link RESTORED_FROM} of the lot and no others. */
export async function restoreOneIn(
  engine: Engine,
  checked: CheckedRequest,
  lot: string,
  by: "lot" | "wafer" = "lot",
): Promise<RestoreOneGroup[]> {
  const { dies } = await rankIn(engine, checked, { lots: [lot], allGuides: false, top: null });
  const restored = restoredDies(engine, checked.request.request);
  const units = new Map<string, { decision: string; probability: number; guide: string }[]>();
  for (const die of dies) {
    if (die.unavailable !== undefined) continue;
    const unit = by === "lot" ? lot : die.die.split("/", 1)[0]!;
    units.set(unit, [...units.get(unit) ?? [], die]);
  }
  return [...units].sort(([a], [b]) => a < b ? -1 : a > b ? 1 : 0).map(([unit, all]) => {
    const yieldWith = (group: string | null): RestoredYield => {
      const each = all.map(({ guide, decision, probability }) => {
        const again = decision === "accept" ? undefined : restored.get(guide)?.find((r) => r.group === group);
        if (again !== undefined) return { probability: again.probability, accepted: again.accepted };
        // As made with the draws that the restored ones are compared with, where there are such.
        const made = decision === "accept" ? undefined : restored.get(guide)?.[0]?.made;
        return { probability: made ?? probability, accepted: decision === "accept" };
      });
      return {
        accepted: each.filter((e) => e.accepted).length,
        expected: expectedYield(each.map((e) => e.probability)),
      };
    };
    const asMade = yieldWith(null);
    const allAtTarget = yieldWith("all");
    const atTarget = RESTORE_GROUP_NAMES.map((group) => ({ trait_group: group, ...yieldWith(group) }));
    const rises = (share: (y: RestoredYield) => number) =>
      restoreOne({
        asMade: share(asMade),
        allAtTarget: share(allAtTarget),
        oneAtTarget: atTarget.map((y) => ({ trait: y.trait_group, yield: share(y) })),
      });
    return {
      unit,
      dies: all.length,
      restored_dies: all.filter((d) => d.decision !== "accept" && restored.has(d.guide)).length,
      as_made: asMade,
      all_at_target: allAtTarget,
      at_target: atTarget,
      by_expectation: rises((y) => Math.min(1, y.expected.expected / all.length)),
      by_count: rises((y) => y.accepted / all.length),
    };
  });
}

function restoredDies(engine: Engine, request: string): Map<string, RestoredDie[]> {
  const { rows } = engine.query(
    `SELECT guide_id, trait_group, probability_as_made, probability_restored, decision_restored FROM restored
     WHERE request = '${request.replaceAll("'", "''")}'`,
  );
  const out = new Map<string, RestoredDie[]>();
  for (
    const [guide, group, made, probability, decision] of rows as [string, string, number, number, string][]
  ) {
    const die = { group, made, probability, accepted: decision === "accept" };
    out.set(guide, [...out.get(guide) ?? [], die]);
  }
  return out;
}
