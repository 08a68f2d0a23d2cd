import { DEFAULT_SAMPLE } from "../../models/decision/mod.ts";
import { InputError } from "../../shared/errors.ts";
import type { SolveSetting } from "../designs/mod.ts";
import { sha256 } from "../json_file.ts";
import { type Ledger, type TableShape, tableStream } from "../ledger/mod.ts";
import { MODEL_VERSION } from "../model_version.ts";
import { OutOfDate } from "../out_of_date.ts";
import { loadPlatform } from "../platforms.ts";
import { loadDesign } from "../records.ts";
import type { LoadedRequest } from "../requests.ts";
import { pooledRuns } from "../traits/pooled_lots.ts";
import { type ComputedLot, computeLot } from "./compute_lot.ts";
import { contradictionsOf, contradictionTable, contradictionText } from "./contradictions.ts";
import { MOST_DRAWS } from "./larger_samples.ts";
import { checkRange } from "./request_range.ts";

export interface PredictLotOptions {
  readonly platforms?: string;
  /** Threads to compute on. */
  readonly workers: number;
  /** Guides × requests done, of all. */
  readonly onProgress?: (done: number, of: number) => void;
  /** Pieces of designs solved, of all that were not in the ledger. */
  readonly onSolving?: SolveSetting["onSolving"];
  /** How finely modes are solved, where not as usual. */
  readonly grid?: SolveSetting["grid"];
}

export interface PredictedRequest {
  readonly request: string;
  readonly run: string;
  /** False when nothing had changed and nothing was computed. */
  readonly computed: boolean;
  /** Readings that the others contradict, with a name each and a sentence; told when the prediction is computed. */
  readonly contradictions: readonly { readonly reading: string; readonly text: string }[];
}

const ROLE_SHAPE = {
  lot: "text",
  request: "text",
  guide_id: "text",
  role: "text",
  trait: "text",
  wavelength_nm: "f64",
  polarisation: "text",
  value: "f64",
  u: "f64",
  basis: "text",
  from_unit: "text",
  distance: "f64",
  readings_used: "i32",
  note: "text",
  share_own: "f64",
  share_die: "f64",
  share_wafer: "f64",
  share_lot: "f64",
  share_other_lots: "f64",
  share_platform: "f64",
} as const satisfies TableShape;

/**
 * Predicts every figure of a lot's guides for some requests; one run per request. A request whose prediction was made from
 * the same files, platform, request and model is not computed again.
 * @param ledger open for writing, with the lot's readings reduced
 * @throws InputError for a wavelength outside the material's range, before anything is computed
 */
export async function predictLot(
  ledger: Ledger,
  lot: string,
  requests: readonly LoadedRequest[],
  options: PredictLotOptions,
): Promise<PredictedRequest[]> {
  const design = await loadDesign(ledger, lot);
  const loaded = await loadPlatform(design.lot.platform, options.platforms);
  for (const request of requests) checkRange(request, loaded);
  const reduced = (await ledger.runsInForce("reduce")).find((run) => run.lot === lot);
  if (reduced === undefined) throw new InputError(`Cannot predict lot ${lot}: its readings are not reduced`);
  // Every lot of the platform says how much lots, wafers, dies and guides differ.
  const others = (await pooledRuns(ledger, loaded)).filter((run) => run.lot !== lot);
  const stale: { request: LoadedRequest; fingerprint: string }[] = [];
  const done: PredictedRequest[] = [];
  for (const request of requests) {
    const fingerprint = sha256(JSON.stringify([
      "predict",
      MODEL_VERSION,
      DEFAULT_SAMPLE.draws,
      DEFAULT_SAMPLE.spectral,
      MOST_DRAWS,
      reduced.fingerprint,
      others.map((run) => [run.lot, run.fingerprint]),
      loaded.fingerprint,
      request.fingerprint,
    ]));
    const held = await ledger.findRun({ kind: "predict", lot, request: request.name, fingerprint });
    if (held === null) stale.push({ request, fingerprint });
    else done.push({ request: request.name, run: held.run, computed: false, contradictions: [] });
  }
  if (stale.length === 0) return done;
  if (!ledger.writable) throw new OutOfDate(`predictions of lot ${lot}`);
  const computed = await computeLot(
    ledger,
    design,
    loaded,
    [reduced, ...others],
    stale.map((s) => s.request),
    options,
  );
  for (const [k, { request, fingerprint }] of stale.entries()) {
    const contradictions = contradictionsOf(computed.pools, request);
    const run = await ledger.commit({
      kind: "predict",
      lot,
      inputs: [],
      parents: [reduced.run, ...others.map((run) => run.run), ...computed.designRuns],
      parameters: {
        request: request.name,
        request_sha256: request.fingerprint,
        platform: loaded.platform.platform,
        platform_sha256: loaded.fingerprint,
        draws: DEFAULT_SAMPLE.draws,
        spectral_draws: DEFAULT_SAMPLE.spectral,
        most_draws: MOST_DRAWS,
        definition: request.request,
      },
      modelVersion: MODEL_VERSION,
      fingerprint,
      tables: {
        figures: computed.stores[k]!.figureTable(),
        decisions: computed.stores[k]!.decisionTable(computed.unavailable),
        used_traits: roleTable(lot, request.name, computed.roles[k]!),
        next_readings: computed.analyses[k]!.readingTable(),
        restored: computed.analyses[k]!.restoredTable(),
        contradictions: contradictionTable(lot, request.name, contradictions, computed.pools),
      },
    });
    done.push({
      request: request.name,
      run: run.run,
      computed: true,
      contradictions: contradictions.map((c) => ({
        reading: `${c.trait} ${c.used.join()}`,
        text: contradictionText(c, computed.pools),
      })),
    });
  }
  const order = new Map(requests.map((r, k) => [r.name, k]));
  return done.sort((a, b) => order.get(a.request)! - order.get(b.request)!);
}

function roleTable(lot: string, request: string, guides: ComputedLot["roles"][number]) {
  const rows = guides.flatMap(({ guide, roles }) => roles.map((role) => ({ guide, role })));
  return tableStream(ROLE_SHAPE, {
    lot: rows.map(() => lot),
    request: rows.map(() => request),
    guide_id: rows.map((r) => r.guide.guide_id),
    role: rows.map((r) => r.role.role),
    trait: rows.map((r) => r.role.trait),
    wavelength_nm: rows.map((r) => r.role.wavelength_nm),
    polarisation: rows.map((r) => r.role.polarisation),
    value: rows.map((r) => r.role.value),
    u: rows.map((r) => r.role.u),
    basis: rows.map((r) => r.role.basis),
    from_unit: rows.map((r) => r.role.from),
    distance: rows.map((r) => r.role.distance),
    readings_used: rows.map((r) => r.role.used.length + r.role.refs.length),
    note: rows.map((r) => r.role.note),
    share_own: rows.map((r) => r.role.shares?.own ?? null),
    share_die: rows.map((r) => r.role.shares?.die ?? null),
    share_wafer: rows.map((r) => r.role.shares?.wafer ?? null),
    share_lot: rows.map((r) => r.role.shares?.lot ?? null),
    share_other_lots: rows.map((r) => r.role.shares?.lots ?? null),
    share_platform: rows.map((r) => r.role.shares?.prior ?? null),
  });
}
