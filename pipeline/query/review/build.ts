import { exactInterval, scoreInterval } from "../../../models/decision/yields.ts";
import type { Ledger } from "../../ledger/mod.ts";
import { requestOf } from "../../ledger/mod.ts";
import { CONFIDENCE, type LotYieldRow, type ReviewData, type ReviewFlag } from "../../review_types.ts";
import type { LotFacts, LotSummary } from "../flag/facts.ts";
import { earlierLots, leftOut, leftOutSentences, lotsBefore } from "../flag/earlier_lots.ts";
import { predictionsInForce } from "../flag/load.ts";
import { inPlay } from "../flag/verdicts.ts";
import type { Rule } from "../flag/rules.ts";
import { suspectName, suspectSentence } from "../flag/suspects_of.ts";
import type { Flag } from "../flag/types.ts";
import { RANKED_FROM } from "../rank.ts";
import { engineWith } from "../sql.ts";
import { answersOf } from "./answers.ts";
import { capabilitiesOf, chartsOf, waferChartsOf } from "./chart_review.ts";
import { requestReview } from "./request_review.ts";
import { traitReviews } from "./trait_review.ts";

export interface ReviewQuestion {
  readonly facts: LotFacts;
  readonly flags: readonly Flag[];
  readonly summaries: readonly LotSummary[];
  readonly rules: readonly Rule[];
}

/** Gathers everything that a review shows of a lot whose predictions are in the ledger. */
export async function reviewOf(
  ledger: Ledger,
  { facts, flags, summaries, rules }: ReviewQuestion,
): Promise<ReviewData> {
  const { lot, platform, design } = facts;
  const played = inPlay(facts);
  const requests = [];
  if (played.length > 0) {
    using engine = await engineWith(ledger, [...RANKED_FROM, "used_traits"], { lots: [lot] });
    for (const prediction of played) requests.push(await requestReview(engine, facts, prediction));
  }
  const own = summaries.find((s) => s.lot === lot)!;
  const charts = chartsOf(own, summaries, rules);
  const shown = flags.map(flagOf);
  const unavailable = new Map(
    facts.predictions.flatMap((p) => p.decisions.map((d) => [d.die_id, d.unavailable] as const)),
  );
  const earlier = earlierLots(own, summaries);
  const aside = leftOutSentences(leftOut(own, summaries));
  return {
    lot,
    platform: platform.platform,
    started: facts.started,
    counts: {
      wafers: facts.wafers.length,
      dies: design.guidesOfDie.size,
      unavailable: [...unavailable.values()].filter((u) => u !== null).length,
      guides: design.guides.length,
      rows: facts.rows,
      quarantined: facts.quarantine.length,
    },
    answers: answersOf(requests, shown, charts, {
      platform: platform.platform,
      before: lotsBefore(own, summaries).length,
      compared: earlier.length,
      leftOut: aside,
    }),
    left_out: aside,
    flags: shown,
    requests,
    requests_without_match: facts.predictions.filter((p) => !played.includes(p)).map((p) =>
      p.checked.request.request
    ),
    wafers: facts.wafers.map((w) => ({
      wafer: w.wafer,
      diameter_mm: w.diameter_mm,
      substrate_batch: w.substrate_batch,
      steps: facts.steps.filter((s) => s.wafer === w.wafer)
        .map(({ step, tool, recipe, finished }) => ({ step, tool, recipe, finished })),
    })),
    coatings: coatingsOf(facts),
    dies: [...design.guidesOfDie].map(([die, [g]]) => ({
      die,
      wafer: g!.wafer,
      x_mm: g!.x_mm,
      y_mm: g!.y_mm,
      unavailable: unavailable.get(die) ?? design.unavailable.get(die)?.reason ?? null,
    })),
    traits: traitReviews(facts),
    charts,
    wafer_charts: waferChartsOf(own, summaries, rules),
    capabilities: capabilitiesOf(facts, rules),
    lots: yieldsOverLots([...earlier, own], requests.map((r) => r.request)),
    coverage: coverageOf(facts),
    quarantine: facts.quarantine.map((q) => ({
      file: q.file_name,
      line: q.source_line,
      column: q.column,
      value: q.value,
      reason: q.reason,
      wanted: q.wanted,
    })),
    remarks: facts.reduceRemarks.map((r) => r.statement),
    provenance: await provenanceOf(ledger, facts),
    cautions: cautionsOf(facts),
  };
}

const flagOf = (f: Flag): ReviewFlag => ({
  scope: f.scope,
  id: f.id,
  rule: f.rule,
  severity: f.severity,
  brief: f.brief,
  statement: f.statement,
  readings: f.evidence.readings,
  dies: f.evidence.dies ?? [],
  suspects: f.suspects.map((s) => ({
    name: suspectName(s),
    sentence: suspectSentence(s),
    p_value: s.p_value,
    verdict: s.verdict,
  })),
});

function yieldsOverLots(lots: readonly LotSummary[], requests: readonly string[]): LotYieldRow[] {
  return requests.flatMap((request) =>
    lots.flatMap((l): LotYieldRow[] => {
      const y = l.yields.get(request);
      if (y === undefined || y.of === 0) return [];
      const { good, of } = y;
      const [exact, score] = [exactInterval(good, of, CONFIDENCE), scoreInterval(good, of, CONFIDENCE)];
      return [{ lot: l.lot, started: l.started, request, good, of, ...exact, exact, score }];
    })
  );
}

function coatingsOf({ coatings }: LotFacts): ReviewData["coatings"] {
  const counts = new Map<string, { coating_run: string; facet: string; dies: number }>();
  for (const { coating_run, facet } of coatings) {
    const held = counts.get(`${coating_run}|${facet}`) ?? { coating_run, facet, dies: 0 };
    counts.set(`${coating_run}|${facet}`, { ...held, dies: held.dies + 1 });
  }
  return [...counts.values()];
}

/** How many guides and dies have a trait of their own. */
function coverageOf({ traits, design }: LotFacts): ReviewData["coverage"] {
  const sets = new Map<string, { guides: Set<string>; dies: Set<string> }>();
  for (const t of traits) {
    if (t.wafer === null || t.trait === "walls_complete" && t.value === 0) continue;
    const held = sets.get(t.trait) ?? { guides: new Set(), dies: new Set() };
    if (t.guide_id !== null) held.guides.add(t.guide_id);
    if (t.die_id !== null) held.dies.add(t.die_id);
    sets.set(t.trait, held);
  }
  return [...sets].sort(([a], [b]) => a < b ? -1 : 1).map(([what, { guides, dies }]) => ({
    what: what === "walls_complete" ? "complete wall list" : what,
    guides: guides.size,
    dies: dies.size,
    of_guides: design.guides.length,
    of_dies: design.guidesOfDie.size,
  }));
}

/** Runs, files and hashes that a page rests on. */
export async function provenanceOf(
  ledger: Ledger,
  { lot, files }: LotFacts,
): Promise<ReviewData["provenance"]> {
  const runs = await predictionsInForce(ledger, lot);
  const reduced = (await ledger.runsInForce("reduce")).find((run) => run.lot === lot)!;
  const newest = runs.at(-1) ?? reduced;
  return {
    program: newest.program,
    model: newest.model,
    runs: [reduced, ...runs].map((r) => ({
      run: r.run,
      kind: r.kind,
      request: requestOf(r),
      model: r.model,
    })),
    files: [...files].map(([name, sha256]) => ({ name, sha256 })),
    platform_sha256: String((reduced.parameters as { platform_sha256?: string }).platform_sha256 ?? ""),
    requests: runs.map((r) => ({
      request: requestOf(r)!,
      sha256: String((r.parameters as { request_sha256?: string }).request_sha256 ?? ""),
    })),
  };
}

/** What has to be said with every suggestion of power, and about the platform. */
export function cautionsOf({ platform }: LotFacts): string[] {
  const { pump_limit_mw, caution } = platform.notes;
  return [
    "Powers are estimates for the light inside the guide. Laser work follows IEC 60825-1 and the laboratory's laser-safety officer.",
    ...(pump_limit_mw === undefined ? [] : [
      `Platform ${platform.platform}: ${pump_limit_mw} mW in the guide${
        caution === undefined ? "" : `; ${caution}`
      }.`,
    ]),
    "Poling uses high voltage, and etching domains uses hydrofluoric acid: local rules and trained staff; nothing here instructs either.",
    "A probability holds within the model, its platform file and the uncertainties stated; it is no warranty of a part.",
  ];
}
