import {
  analyseGuide,
  type ExplainedTrait,
  explainGuide,
  type GuideExplanation,
  type RestoredGuide,
  type Role,
} from "../../models/decision/mod.ts";
import { InputError, LedgerError } from "../../shared/errors.ts";
import { dieOfGuide } from "../../shared/ids.ts";
import type { Basis, Polarisation } from "../../shared/vocabulary.ts";
import { askedBy, designsFor } from "../designs/mod.ts";
import { type Ledger, openLedger } from "../ledger/mod.ts";
import { MODEL_VERSION } from "../model_version.ts";
import { buildModel, loadPlatform } from "../platforms.ts";
import { loadDesign } from "../records.ts";
import type { LoadedRequest } from "../requests.ts";
import { knownReadingU } from "../traits/known_readings.ts";
import { loadTraits } from "../traits/load_traits.ts";
import { loadOtherLots } from "../traits/pooled_lots.ts";
import { waveOf } from "../traits/role_wave.ts";
import type { ReadingAdvice } from "./reading_advice.ts";
import { bestGuide, pooledBy } from "./trace.ts";
import { lotOf, predictionOf } from "./trace_find.ts";
import { deriveGuide, followRoles, rowsOfGuide, type StoredRole } from "./trace_roles.ts";

/** A trait that a guide's prediction rests on, as it was resolved. */
export interface ExplainedRole {
  readonly roles: readonly Role[];
  readonly trait: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly value: number | null;
  readonly u: number | null;
  readonly basis: Basis;
  /** Unit whose readings were used, or the platform. */
  readonly from: string;
  readonly note: string | null;
  /** Per required figure its share of the variance; null where the trait is not drawn: a list of walls, a bare facet. */
  readonly shares: Readonly<Record<string, number | null>>;
}

export interface GuideExplained {
  readonly request: string;
  readonly lot: string;
  readonly die: string;
  readonly guide: string;
  /** As predicted; the explanation below has draws of its own. */
  readonly decision: "accept" | "hold" | "reject";
  readonly probability: number;
  readonly draws: number;
  readonly limited_by: string | null;
  readonly unavailable?: string;
  readonly accept_at: number;
  readonly reject_below: number;
  readonly explanation: GuideExplanation;
  readonly traits: readonly ExplainedRole[];
  readonly next_readings: readonly ReadingAdvice[];
  readonly as_made: number | null;
  readonly restored: readonly RestoredGuide[];
}

interface DecisionRow {
  readonly decision: GuideExplained["decision"];
  readonly probability: number;
  readonly draws: number;
  readonly limited_by: string | null;
  readonly unavailable: string | null;
}

/**
 * Why a guide (of a die: the guide that stands for it) is decided as it is for a request, from the readings that its prediction
 * in force was made of.
 * @throws InputError for an unknown id; LedgerError when the traits can't be resolved as the prediction had them
 */
export async function explainIn(
  ledger: Ledger,
  request: LoadedRequest,
  id: string,
  platforms?: string,
): Promise<GuideExplained> {
  const { lot, isDie } = await lotOf(ledger, id);
  const { run } = await predictionOf(ledger, lot, request.name);
  const guideId = isDie ? await bestGuide(ledger, lot, request, id) : id;
  await using past = await openLedger(ledger.directory, { write: false, upTo: run.sequence });
  const [reduced, ...others] = await pooledBy(past, run);
  const [decided] = await rowsOfGuide<DecisionRow>(past, run, "decisions", guideId);
  const design = await loadDesign(past, lot);
  const guide = design.guideById.get(guideId);
  if (reduced === undefined || decided === undefined || guide === undefined) {
    throw new LedgerError(`Cannot explain ${guideId}: run ${run.run} does not hold what it was made of`);
  }
  const loaded = await loadPlatform(design.lot.platform, platforms);
  if (run.model !== MODEL_VERSION) {
    throw new InputError(
      `Cannot explain ${guideId}: run ${run.run} was made by another version of the model`,
    );
  }
  const traits = await loadTraits(past, reduced);
  const pooled = await loadOtherLots(past, others);
  const { inputs, roles } = await deriveGuide(past, design, traits, loaded.platform, request, guide, pooled);
  const stored = await rowsOfGuide<StoredRole>(past, run, "used_traits", guideId);
  followRoles(stored, roles, true, run.run);
  const widths = design.guides.map((g) => g.width_um);
  const { designs } = await designsFor(past, loaded, widths, [askedBy(request)]);
  const model = buildModel({ ...loaded, designs });
  const options = { recorded: request.spectrum };
  const explanation = explainGuide(model, request, inputs, options);
  const open = decided.decision !== "accept" && decided.unavailable === null;
  const analysis = open
    ? analyseGuide(model, request, inputs, {
      decision: decided.decision,
      designWidth_um: guide.width_um,
      platform: loaded.platform,
      known: knownReadingU(lot, traits, loaded.platform),
    }, options)
    : null;
  const { accept_at, reject_below } = request.request.decide;
  return {
    request: request.name,
    lot,
    die: dieOfGuide(guideId),
    guide: guideId,
    decision: decided.decision,
    probability: decided.probability,
    draws: decided.draws,
    limited_by: decided.limited_by,
    ...(decided.unavailable === null ? {} : { unavailable: decided.unavailable }),
    accept_at,
    reject_below,
    explanation,
    traits: explainedRoles(stored, explanation),
    next_readings: (analysis?.readings ?? []).map(({ reading, doubt, reduction, after }) => ({
      kind: reading.kind,
      reads: reading.reads.map((read) => ({
        trait: read.trait,
        wavelength_nm: null,
        polarisation: null,
        ...waveOf(request, read),
        u: read.u,
        from: read.from,
      })),
      doubt,
      reduction,
      p_accept: after.accept,
      p_hold: after.hold,
      p_reject: after.reject,
    })),
    as_made: analysis?.probability ?? null,
    restored: analysis?.restored ?? [],
  };
}

/** The stored traits, those that were drawn as one in one row, with their shares. */
function explainedRoles(stored: readonly StoredRole[], { figures }: GuideExplanation): ExplainedRole[] {
  const drawn = (row: StoredRole): ExplainedTrait | undefined =>
    figures.flatMap((f) => f.traits).find((t) => t.trait === row.trait && t.roles.includes(row.role));
  const rows = new Map<string, ExplainedRole>();
  for (const [k, row] of stored.entries()) {
    const column = drawn(row);
    const name = column?.key ?? `row ${k}`;
    const held = rows.get(name);
    rows.set(name, {
      roles: held === undefined ? [row.role] : [...new Set([...held.roles, row.role])],
      trait: row.trait,
      wavelength_nm: row.wavelength_nm,
      polarisation: row.polarisation,
      value: row.value,
      u: row.u,
      basis: row.basis,
      from: row.from_unit,
      note: row.note,
      shares: Object.fromEntries(figures.map((f) => [
        f.figure,
        f.traits.find((t) => t.key === column?.key)?.share ?? null,
      ])),
    });
  }
  return [...rows.values()];
}
