import { InputError, LedgerError } from "../../shared/errors.ts";
import { dieOfGuide } from "../../shared/ids.ts";
import { type Figure, figureAbsence } from "../../shared/schemas/figures.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Basis } from "../../shared/vocabulary.ts";
import { RESTS_ON, ROLES } from "../../models/decision/mod.ts";
import { type Ledger, type Manifest, openLedger } from "../ledger/mod.ts";
import { MODEL_VERSION } from "../model_version.ts";
import { type LoadedPlatform, loadPlatform } from "../platforms.ts";
import { type GuideRecord, loadDesign, type LotDesign } from "../records.ts";
import { loadTraits } from "../traits/load_traits.ts";
import { loadOtherLots } from "../traits/pooled_lots.ts";
import type { RoleTrait } from "../traits/guide_traits.ts";
import type { TraitRow } from "../traits/trait_row.ts";
import { rankGuides } from "./rank.ts";
import { figureNamed, lotOf, predictionOf, type PredictParameters, requestInRun } from "./trace_find.ts";
import { historyOf } from "./trace_history.ts";
import { deriveGuide, type FollowedRole, followRoles, rowsOfGuide, type StoredRole } from "./trace_roles.ts";
import { staleness } from "./trace_staleness.ts";
import { defaultsOf, tracedTraits } from "./trace_traits.ts";
import type { Trace } from "./trace_types.ts";

export interface TraceOptions {
  readonly figure: string;
  /** The request's name; null when the lot is predicted for one alone. */
  readonly request: string | null;
  /** The user's own platform files. */
  readonly platforms?: string;
  /** Fingerprint of the request's file as it is now, to be compared with the one predicted for. */
  readonly requestFingerprint?: string;
}

/**
 * Follows a figure of a guide (of a die: of its best guide) to the traits it rests on and to every reading under them, as
 * the prediction in force used them: readings that were taken in later do not show.
 * @throws InputError for an unknown id, figure or request; LedgerError when what is stored can't be followed
 */
export async function traceFigure(ledger: Ledger, id: string, options: TraceOptions): Promise<Trace> {
  const figure = figureNamed(options.figure);
  const { lot, isDie } = await lotOf(ledger, id);
  const { run, parameters } = await predictionOf(ledger, lot, options.request);
  const checked = requestInRun(run, parameters);
  const absence = figureAbsence(figure, checked.request.process, checked.pulsed);
  if (absence !== null) {
    throw new InputError(`Cannot trace ${figure} for request ${parameters.request}: ${absence}`, {
      value: figure,
    });
  }
  const guideId = isDie ? await bestGuide(ledger, lot, checked, id) : id;
  await using past = await openLedger(ledger.directory, { write: false, upTo: run.sequence });
  const [reduced, ...others] = await pooledBy(past, run);
  if (reduced === undefined) throw new LedgerError(`Cannot trace: run ${run.run} names no run of traits`);
  const design = await loadDesign(past, lot);
  const guide = design.guideById.get(guideId);
  const row = (await rowsOfGuide<FigureRow>(past, run, "figures", guideId)).find((r) => r.figure === figure);
  if (guide === undefined || row === undefined) {
    throw new InputError(
      `Cannot trace ${figure} of ${guideId}: run ${run.run} did not predict it; run predict ${lot} again`,
      { value: guideId },
    );
  }
  const loaded = await loadPlatform(parameters.platform, options.platforms);
  const remarks = await staleness(
    ledger,
    past,
    run,
    [reduced, ...others],
    parameters,
    loaded,
    options.requestFingerprint,
  );
  const traits = await loadTraits(past, reduced);
  const context = { past, run, design, traits, others };
  const roles = await followedRoles(context, loaded, checked, guide, remarks);
  const ofFigure = ROLES.filter((role) => RESTS_ON[figure].includes(role));
  const shown = roles.filter((r) => ofFigure.includes(r.role));
  const [decision] = await rowsOfGuide<{ unavailable: string | null }>(past, run, "decisions", guideId);
  return {
    figure,
    request: parameters.request,
    request_sha256: parameters.request_sha256,
    lot,
    die: dieOfGuide(guideId),
    guide: guideId,
    mean: row.mean,
    u: row.u,
    lo: row.lo,
    hi: row.hi,
    probability: row.probability,
    basis: row.basis,
    ...(row.reason === null ? {} : { reason: row.reason }),
    ...(decision?.unavailable == null ? {} : { unavailable: decision.unavailable }),
    run: run.run,
    model: run.model,
    program: run.program,
    runs: {
      predict: run.run,
      reduce: reduced.run,
      ingest: reduced.parents,
      other_lots: others.map((r) => r.run),
    },
    remarks,
    traits: await tracedTraits(past, lot, ofFigure, shown, traits, parameters.platform),
    platform: {
      platform: parameters.platform,
      sha256: parameters.platform_sha256,
      defaults: defaultsOf(shown, parameters.platform),
    },
    design: {
      width_um: guide.width_um,
      period_um: guide.period_um,
      length_mm: guide.length_mm,
      poled_from_mm: guide.poled_from_mm,
      poled_length_mm: guide.poled_length_mm,
      file_name: guide.file_name,
      source_file: guide.source_file,
      source_line: guide.source_line,
    },
    ...await historyOf(past, lot, guide),
    request_definition: parameters.definition,
  };
}

interface FigureRow {
  readonly figure: Figure;
  readonly mean: number | null;
  readonly u: number | null;
  readonly lo: number | null;
  readonly hi: number | null;
  readonly probability: number | null;
  readonly basis: Basis;
  readonly reason: string | null;
}

/** The guide by which a ranking shows the die. */
export async function bestGuide(
  ledger: Ledger,
  lot: string,
  checked: CheckedRequest,
  die: string,
): Promise<string> {
  const { dies } = await rankGuides(ledger, checked, { lots: [lot], allGuides: false, top: null });
  const found = dies.find((d) => d.die === die);
  if (found !== undefined) return found.guide;
  throw new InputError(
    `Cannot trace ${die}: the prediction of lot ${lot} does not know it; run predict ${lot} again`,
    { value: die },
  );
}

/** Runs of traits that a prediction was made from: its own lot's first, then those of the other lots. */
export async function pooledBy(past: Ledger, run: Manifest): Promise<Manifest[]> {
  const runs = new Map((await past.runs()).map((r) => [r.run, r]));
  const reduced = run.parents.map((p) => runs.get(p)).filter((r) => r?.kind === "reduce") as Manifest[];
  return reduced[0]?.run === run.parents[0] ? reduced : [];
}

/** The stored traits of a guide with what is under them. Where platform or model differ, what can still be told is. */
async function followedRoles(
  { past, run, design, traits, others }: {
    readonly past: Ledger;
    readonly run: Manifest;
    readonly design: LotDesign;
    readonly traits: readonly TraitRow[];
    readonly others: readonly Manifest[];
  },
  { platform, fingerprint }: LoadedPlatform,
  checked: CheckedRequest,
  guide: GuideRecord,
  remarks: string[],
): Promise<readonly FollowedRole[]> {
  const stored = await rowsOfGuide<StoredRole>(past, run, "used_traits", guide.guide_id);
  const { platform_sha256 } = run.parameters as PredictParameters;
  const exact = fingerprint === platform_sha256 && run.model === MODEL_VERSION;
  let derived: readonly RoleTrait[] = [];
  try {
    const pooled = await loadOtherLots(past, others);
    derived = (await deriveGuide(past, design, traits, platform, checked, guide, pooled)).roles;
  } catch (error) {
    if (exact || !(error instanceof InputError)) throw error;
  }
  const followed = followRoles(stored, derived, exact, run.run);
  const lost = followed.filter((f) => !f.followed);
  if (lost.length > 0) {
    remarks.push(
      `the readings under ${lost.length} of ${followed.length} traits can't be told any more: ` +
        [...new Set(lost.map((f) => f.role))].join(", "),
    );
  }
  return followed;
}
