import { checkRequest, requestSchema } from "../../../shared/schemas/request.ts";
import { InputError } from "../../../shared/errors.ts";
import type { Figure } from "../../../shared/schemas/figures.ts";
import { type Ledger, type Manifest, requestOf } from "../../ledger/mod.ts";
import { loadPlatform } from "../../platforms.ts";
import { loadDesign, lotsOf, recordsOf, rowsOf } from "../../records.ts";
import { loadTraits } from "../../traits/load_traits.ts";
import type { Engine } from "../engine.ts";
import { engineWith } from "../sql.ts";
import type {
  DecisionFact,
  FigureFact,
  LotFacts,
  LotSummary,
  MadeWith,
  OutcomeFact,
  PredictionFacts,
  QuarantineFact,
  StepFact,
  WaferFact,
  YieldSummary,
} from "./facts.ts";
import { loadAnalyses } from "./analyses.ts";
import { foundPeriods } from "./period.ts";
import { dieVerdicts } from "./verdicts.ts";
import { seriesOf, summaryOf } from "./series.ts";
import { TRAIT_NAMES } from "./facts.ts";

export interface LoadFactsOptions {
  /** Requests named by the user; null: none was. */
  readonly requests: readonly string[] | null;
  /** Figures that rules name, besides those required and those with outcomes. */
  readonly figures: readonly string[];
  readonly platforms?: string;
}

/** Everything of a lot that rules look at. @throws InputError for an unknown lot, or one whose readings are not reduced */
export async function loadFacts(ledger: Ledger, lot: string, options: LoadFactsOptions): Promise<LotFacts> {
  const design = await loadDesign(ledger, lot);
  const { platform } = await loadPlatform(design.lot.platform, options.platforms);
  const reduced = (await ledger.runsInForce("reduce")).find((run) => run.lot === lot);
  if (reduced === undefined) throw new InputError(`Cannot flag lot ${lot}: its readings are not reduced`);
  const traits = await loadTraits(ledger, reduced);
  const files = await ledger.activeFiles(lot);
  const table = async <T>(name: string) =>
    (await ledger.readActive(name, lot)).flatMap((part) => rowsOf(part.table)) as unknown as T[];
  const outcomes = await table<OutcomeFact>("outcomes");
  const inputs = new Map(
    (await ledger.runs()).flatMap((run) => run.inputs.map((i) => [`${run.run}|${i.name}`, i])),
  );
  return {
    lot,
    started: design.lot.started,
    platform,
    design,
    wafers: await table<WaferFact>("wafers"),
    steps: (await table<StepFact>("steps")).sort((a, b) => a.order - b.order),
    coatings: [...design.coatingOf.values()],
    traits,
    made: madeWith(reduced),
    reduceRemarks: rowsOf(await ledger.readTable(reduced, "reduce_remarks")) as never,
    quarantine: await table<QuarantineFact>("quarantine"),
    rows: files.reduce((sum, f) => sum + (inputs.get(`${f.run}|${f.name}`)?.rows ?? 0), 0),
    files: new Map(files.map((f) => [f.name, f.sha256])),
    outcomes,
    periods: await foundPeriods(ledger, design, traits),
    predictions: await loadPredictions(ledger, lot, outcomes, options),
    requestsNamed: options.requests !== null,
  };
}

/** What a run was computed with. */
function madeWith({ model, parameters }: Manifest): MadeWith {
  const { platform_sha256, request_sha256 } = parameters as Record<string, string | undefined>;
  return {
    model,
    platform_sha256: platform_sha256 ?? "",
    ...(request_sha256 === undefined ? {} : { request_sha256 }),
  };
}

async function loadPredictions(
  ledger: Ledger,
  lot: string,
  outcomes: readonly OutcomeFact[],
  { requests, figures }: LoadFactsOptions,
): Promise<PredictionFacts[]> {
  const runs = await predictionsInForce(ledger, lot);
  if (runs.length === 0) return [];
  using engine = await engineWith(ledger, ["decisions", "figures"], { lots: [lot] });
  const decisions = decisionsOf(engine);
  const analyses = await Promise.all(runs.map((run) => loadAnalyses(ledger, run)));
  return runs.map((run, k) => {
    const checked = definitionOf(run);
    const { request } = checked.request;
    const wanted = new Set<string>([
      ...checked.requirements.map((r) => r.figure),
      ...outcomes.filter((o) => o.request === request).map((o) => o.figure),
      ...figures,
    ]);
    return {
      checked,
      named: requests?.includes(request) ?? false,
      decisions: decisions.get(request) ?? [],
      figures: figuresOf(engine, request, [...wanted]),
      analyses: analyses[k]!,
    };
  });
}

/** Predictions in force of a lot, by request. */
export async function predictionsInForce(ledger: Ledger, lot: string): Promise<Manifest[]> {
  return (await ledger.runsInForce("predict")).filter((run) => run.lot === lot)
    .sort((a, b) => requestOf(a)! < requestOf(b)! ? -1 : 1);
}

/** The request as a prediction run holds it. */
export function definitionOf(run: Manifest) {
  const { definition } = run.parameters as { definition: unknown };
  const checked = checkRequest(requestSchema.parse(definition));
  if ("problems" in checked) {
    throw new InputError(`Cannot use the request that run ${run.run} holds: ${checked.problems[0]!.reason}`);
  }
  return checked;
}

const quoted = (text: string): string => `'${text.replaceAll("'", "''")}'`;

function decisionsOf(engine: Engine): Map<string, DecisionFact[]> {
  const out = new Map<string, DecisionFact[]>();
  const { rows } = engine.query(
    `SELECT request, guide_id, die_id, wafer, decision, probability, limited_by, "matched", unavailable
     FROM decisions ORDER BY request, guide_order`,
  );
  for (
    const [request, guide_id, die_id, wafer, decision, probability, limited_by, matched, unavailable] of rows
  ) {
    const fact = { guide_id, die_id, wafer, decision, probability, limited_by, matched, unavailable };
    const held = out.get(request as string);
    if (held === undefined) out.set(request as string, [fact as DecisionFact]);
    else held.push(fact as DecisionFact);
  }
  return out;
}

function figuresOf(engine: Engine, request: string, figures: readonly string[]) {
  const out = new Map<string, Map<Figure, FigureFact>>();
  const { rows } = engine.query(
    `SELECT guide_id, figure, mean, u, lo, hi, probability, basis, reason FROM figures
     WHERE request = ${quoted(request)} AND figure IN (${figures.map(quoted).join(", ") || "NULL"})`,
  );
  for (const [guide, figure, mean, u, lo, hi, probability, basis, reason] of rows) {
    let held = out.get(guide as string);
    if (held === undefined) out.set(guide as string, held = new Map());
    held.set(figure as Figure, { mean, u, lo, hi, probability, basis, reason } as FigureFact);
  }
  return out;
}

/** What charts compare lots of one platform by; lots without reduced readings are left out. */
export async function loadSummaries(
  ledger: Ledger,
  platformId: string,
  platforms?: string,
): Promise<LotSummary[]> {
  const { platform } = await loadPlatform(platformId, platforms);
  const reduced = new Map((await ledger.runsInForce("reduce")).map((run) => [run.lot, run]));
  const lots: string[] = [];
  const records = new Map<string, { platform: string; started: string | null }>();
  for (const lot of await lotsOf(ledger)) {
    const [record] = await recordsOf(ledger, "lots", lot);
    if (record?.platform !== platformId || !reduced.has(lot)) continue;
    lots.push(lot);
    records.set(lot, record);
  }
  const yields = await yieldsOf(ledger, lots);
  const out: LotSummary[] = [];
  for (const lot of lots) {
    const table = async <T>(name: string) =>
      (await ledger.readActive(name, lot)).flatMap((part) => rowsOf(part.table)) as unknown as T[];
    const series = seriesOf(await loadTraits(ledger, reduced.get(lot)!), TRAIT_NAMES, platform);
    out.push({
      lot,
      made: madeWith(reduced.get(lot)!),
      started: records.get(lot)!.started,
      wafers: await table<WaferFact>("wafers"),
      steps: await table<StepFact>("steps"),
      series: new Map(series.map((s) => [s.key, summaryOf(s)])),
      yields: yields.get(lot) ?? new Map(),
    });
  }
  return out;
}

/** Lot → request → dies accepted, of those that can be shipped; requests that no guide of the lot matches are left out. */
async function yieldsOf(ledger: Ledger, lots: readonly string[]) {
  const out = new Map<string, Map<string, YieldSummary>>();
  for (const run of await ledger.runsInForce("predict")) {
    if (!lots.includes(run.lot ?? "")) continue;
    // Read without the SQL engine, whose start costs more than all tables of a lot.
    const decisions = rowsOf(await ledger.readTable(run, "decisions")) as unknown as DecisionFact[];
    if (!decisions.some((d) => d.matched)) continue;
    const ready = dieVerdicts(decisions).filter((d) => d.unavailable === null);
    const good = ready.filter((d) => d.decision === "accept").length;
    const own = out.get(run.lot!) ?? new Map<string, YieldSummary>();
    out.set(run.lot!, own.set(requestOf(run)!, { good, of: ready.length, made: madeWith(run) }));
  }
  return out;
}
