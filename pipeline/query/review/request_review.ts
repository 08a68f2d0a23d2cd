import type { CheckedRequest } from "../../../shared/schemas/request.ts";
import type { Figure } from "../../../shared/schemas/figures.ts";
import { BASES, type Basis } from "../../../shared/vocabulary.ts";
import type { Budget, BudgetRow, LimitRow, RankedDie, RequestReview } from "../../review_types.ts";
import type { Engine } from "../engine.ts";
import type { LotFacts, PredictionFacts } from "../flag/facts.ts";
import { byWafer, type DieVerdict, dieVerdicts } from "../flag/verdicts.ts";
import { type RankedEntry, rankIn } from "../rank.ts";
import { mostlyUnmatched, NO_MATCH } from "../limits.ts";
import { gainsOf, missingReadings } from "./gains.ts";
import { groupShares, shareOf, waferShares } from "./yields.ts";

const FACTORS = ["survival", "facet", "coupling", "filter", "detector", "heralding"] as const;
const ORDER = ["accept", "hold", "reject"] as const;

/** How a lot does for one request. `engine` holds what a ranking reads, and `used_traits`, of this lot alone. */
export async function requestReview(
  engine: Engine,
  facts: LotFacts,
  prediction: PredictionFacts,
): Promise<RequestReview> {
  const { checked, decisions } = prediction;
  const { request } = checked.request;
  const dies = dieVerdicts(decisions);
  const ranking = await rankIn(engine, checked, { lots: [facts.lot], allGuides: false, top: null });
  const matched = new Map(decisions.map((d) => [d.guide_id, d.matched]));
  return {
    request,
    process: checked.request.process,
    description: describe(checked),
    requirements: checked.requirements.map((r) => ({
      figure: r.figure,
      at_least: Number.isFinite(r.atLeast) ? r.atLeast : null,
      at_most: Number.isFinite(r.atMost) ? r.atMost : null,
    })),
    order_by: checked.orderBy,
    decide: checked.request.decide,
    total: shareOf(dies),
    wafers: waferShares(dies),
    groups: groupShares(decisions, (guide) => facts.design.guideById.get(guide)?.group ?? null),
    limits: limitsOf(prediction, dies),
    limits_by_wafer: [...byWafer(dies)].map(([wafer, own]) => ({ wafer, limits: limitsOf(prediction, own) })),
    gains: gainsOf(prediction, dies, facts.lot),
    missing_readings: missingReadings(prediction, dies),
    // Within a decision in the order of the request; what can't be shipped is rejected and comes last as it is.
    ranked: ORDER.flatMap((decision) => ranking.dies.filter((e) => e.decision === decision))
      .map((e) => rankedDie(e, checked, matched.get(e.guide) ?? false)),
    budgets: checked.request.process === "pair-generation" ? budgetsOf(ranking.dies) : [],
    rests_on: restsOn(engine, request, new Set(decisions.filter((d) => d.matched).map((d) => d.guide_id))),
  };
}

/** A request in one line. */
export function describe({ request, waves, processKey }: CheckedRequest): string {
  const [p, s, i] = [waves.lambdaP, waves.lambdaS, waves.lambdaI].map((l) => Number((l * 1e9).toFixed(2)));
  switch (request.process) {
    case "second-harmonic":
      return `second harmonic, ${s} nm to ${p} nm (${processKey})`;
    case "sum-frequency":
      return `sum frequency, ${s} nm and ${i} nm to ${p} nm (${processKey})`;
    case "difference-frequency":
      return `difference frequency, ${p} nm and ${s} nm to ${i} nm (${processKey})`;
    case "pair-generation":
      return `photon pairs at ${s} nm and ${i} nm from ${p} nm (${processKey})`;
  }
}

/** How a prediction's remark on a contradicted reading of its guide begins. */
const CONTRADICTED = "contradicted_reading: ";

function rankedDie(e: RankedEntry, { requirements }: CheckedRequest, matched: boolean): RankedDie {
  return {
    die: e.die,
    guide: e.guide,
    decision: e.decision,
    probability: e.probability,
    limited_by: e.limited_by,
    qualifying_guides: e.qualifying_guides,
    guides_of_die: e.guides_of_die,
    matched,
    unavailable: e.unavailable ?? null,
    contradicted: (e.remarks ?? []).filter((r) => r.startsWith(CONTRADICTED)).map((r) =>
      r.slice(CONTRADICTED.length)
    ),
    operating_temperature_c: e.figures.operating_temperature_c,
    figures: Object.fromEntries(requirements.map((r) => [r.figure, e.figures[r.figure]])),
  };
}

/** Dies that are not accepted, by the requirement least often met. */
function limitsOf({ checked, figures }: PredictionFacts, dies: readonly DieVerdict[]): LimitRow[] {
  const rows = new Map<
    string,
    { rejected: number; on_hold: number; would_pass: number; wafers: Set<string> }
  >();
  for (const d of dies) {
    const { limited_by, probability, matched } = d.best;
    if (d.unavailable !== null || d.decision === "accept" || limited_by === null) continue;
    const figure = mostlyUnmatched(probability, Number(matched)) ? NO_MATCH : limited_by;
    const row = rows.get(figure) ?? { rejected: 0, on_hold: 0, would_pass: 0, wafers: new Set() };
    if (d.decision === "reject") row.rejected++;
    else row.on_hold++;
    row.wafers.add(d.wafer);
    if (othersPass(checked, figures.get(d.best.guide_id), figure, Number(matched))) row.would_pass++;
    rows.set(figure, row);
  }
  return [...rows].map(([figure, r]) => ({ figure, ...r, wafers: [...r.wafers] }))
    .sort((a, b) => b.rejected + b.on_hold - a.rejected - a.on_hold || (a.figure < b.figure ? -1 : 1));
}

/**
 * All other requirements hold together with the probability asked for: 1 − Σ(1 − p) bounds it from below, however they depend
 * on each other. Where phase matching limits, the others are those of the draws that match.
 */
function othersPass(
  { requirements, request }: CheckedRequest,
  figures: ReadonlyMap<string, { readonly probability: number | null }> | undefined,
  limiting: string,
  matched: number,
): boolean {
  if (limiting === NO_MATCH && matched === 0) return false; // of no draw is known what it would do
  // A requirement met more often than there is a match needs none.
  const given = (p: number) => limiting === NO_MATCH && p <= matched ? p / matched : p;
  const others = requirements.filter((r) => r.figure !== limiting).map((r) =>
    given(figures?.get(r.figure)?.probability ?? 0)
  );
  return 1 - others.reduce((sum, p) => sum + (1 - p), 0) >= request.decide.accept_at;
}

/** Budget of the best die (the first accepted one, else the first) and of the one with the median heralding efficiency. */
function budgetsOf(ranked: readonly RankedEntry[]): Budget[] {
  const ready = ranked.filter((e) => e.unavailable === undefined && e.figures.heralding_signal.mean !== null);
  if (ready.length === 0) return [];
  const best = ready.find((e) => e.decision === "accept") ?? ready[0]!;
  const sorted = [...ready].sort((a, b) =>
    b.figures.heralding_signal.mean! - a.figures.heralding_signal.mean!
  );
  const middle = sorted[Math.floor((sorted.length - 1) / 2)]!;
  const of = (which: "best" | "median", e: RankedEntry): Budget => ({
    which,
    die: e.die,
    guide: e.guide,
    rows: budgetRows(e),
  });
  return [of("best", best), of("median", middle)];
}

/** Factors of the heralding budget, and their product. */
export const budgetRows = (e: RankedEntry): BudgetRow[] =>
  FACTORS.map((factor) => ({
    factor,
    signal: e.figures[`${factor}_signal` as Figure],
    idler: e.figures[`${factor}_idler` as Figure],
  }));

/** Of how many matched guides each role rests on what. */
function restsOn(engine: Engine, request: string, guides: ReadonlySet<string>): RequestReview["rests_on"] {
  const { rows } = engine.query(
    `SELECT role, trait, basis, guide_id FROM used_traits WHERE request = '${request.replaceAll("'", "''")}'`,
  );
  const counts = new Map<string, Set<string>>();
  for (const [role, trait, basis, guide] of rows as [string, string, Basis, string][]) {
    if (!guides.has(guide)) continue;
    const key = `${role}|${trait}|${basis}`;
    const held = counts.get(key);
    if (held === undefined) counts.set(key, new Set([guide]));
    else held.add(guide);
  }
  return [...counts].map(([key, set]) => {
    const [role, trait, basis] = key.split("|") as [string, string, Basis];
    return { role, trait, basis, guides: set.size };
  }).sort((a, b) =>
    a.role < b.role
      ? -1
      : a.role > b.role
      ? 1
      : a.trait < b.trait
      ? -1
      : a.trait > b.trait
      ? 1
      : BASES.indexOf(a.basis) - BASES.indexOf(b.basis)
  );
}
