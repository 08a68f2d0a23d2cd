import { DEFAULT_SAMPLE } from "../../models/decision/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { askedBy, designsFor, type SolveSetting } from "../designs/mod.ts";
import { sha256 } from "../json_file.ts";
import { type Ledger, type Manifest, type TableShape, tableStream } from "../ledger/mod.ts";
import { MODEL_VERSION } from "../model_version.ts";
import { OutOfDate } from "../out_of_date.ts";
import { type LoadedPlatform, loadPlatform } from "../platforms.ts";
import { type GuideRecord, loadDesign, type LotDesign, recordsOf } from "../records.ts";
import type { LoadedRequest } from "../requests.ts";
import { resolveGuide, type RoleTrait, windowsByUnit } from "../traits/guide_traits.ts";
import { alongGuides } from "../traits/along_guide.ts";
import { completeWalls, streamWalls } from "../traits/guide_walls.ts";
import { loadTraits } from "../traits/load_traits.ts";
import { loadOtherLots, pooledRuns } from "../traits/pooled_lots.ts";
import { TraitPools } from "../traits/pools.ts";
import { couplingRemarks, powerCautions } from "./cautions.ts";
import { contradictionsOf, contradictionTable, contradictionText } from "./contradictions.ts";
import { FigureStore, unavailableDies } from "./figure_store.ts";
import type { Job, WorkerSetup } from "./jobs.ts";
import { type JobPool, openPool } from "./pool.ts";
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
  /** Readings that the others contradict, as sentences; told when the prediction is computed. */
  readonly contradictions: readonly string[];
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
  const computed = await compute(
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
        definition: request.request,
      },
      modelVersion: MODEL_VERSION,
      fingerprint,
      tables: {
        figures: computed.stores[k]!.figureTable(),
        decisions: computed.stores[k]!.decisionTable(computed.unavailable),
        used_traits: roleTable(lot, request.name, computed.roles[k]!),
        contradictions: contradictionTable(lot, request.name, contradictions, computed.pools),
      },
    });
    done.push({
      request: request.name,
      run: run.run,
      computed: true,
      contradictions: contradictions.map((c) => contradictionText(c, computed.pools)),
    });
  }
  const order = new Map(requests.map((r, k) => [r.name, k]));
  return done.sort((a, b) => order.get(a.request)! - order.get(b.request)!);
}

interface Computed {
  readonly stores: FigureStore[];
  readonly roles: { guide: GuideRecord; roles: readonly RoleTrait[] }[][];
  readonly unavailable: Map<string, string>;
  readonly designRuns: readonly string[];
  readonly pools: TraitPools;
}

const BATCH = 4;

async function compute(
  ledger: Ledger,
  design: LotDesign,
  loaded: LoadedPlatform,
  [reduced, ...others]: readonly [Manifest, ...Manifest[]],
  requests: readonly LoadedRequest[],
  options: PredictLotOptions,
): Promise<Computed> {
  const { lot } = design.lot;
  const { designs, runs: designRuns } = await designsFor(
    ledger,
    loaded,
    design.guides.map((g) => g.width_um),
    requests.map(askedBy),
    {
      workers: options.workers,
      ...(options.onSolving === undefined ? {} : { onSolving: options.onSolving }),
      ...(options.grid === undefined ? {} : { grid: options.grid }),
    },
  );
  const traits = await loadTraits(ledger, reduced);
  const pools = new TraitPools(loaded.platform, design, traits, await loadOtherLots(ledger, others));
  const windows = windowsByUnit(await recordsOf(ledger, "poling", lot));
  const along = alongGuides(await recordsOf(ledger, "geometry", lot), loaded.platform);
  const unavailable = unavailableDies(design, await recordsOf(ledger, "cutback", lot));
  const stores = requests.map((r) => new FigureStore(lot, r.name, design.guides));
  const roles: Computed["roles"] = requests.map(() => []);
  const setup: WorkerSetup = {
    platform: { ...loaded, designs },
    requests: requests.map((
      { request, waves, processKey, pulsed, requirements, orderBy, descending, spectrum },
    ) => ({
      checked: { request, waves, processKey, pulsed, requirements, orderBy, descending },
      recorded: spectrum,
    })),
  };
  const total = design.guides.length * requests.length;
  let finished = 0;
  const pool = openPool(setup, options.workers, total, ({ request, guide, prediction }) => {
    const asked = requests[request]!;
    const cautions = [
      ...powerCautions(loaded.platform, asked.request, prediction.figures),
      ...couplingRemarks(designs, design.guides[guide]!.width_um, asked, prediction.figures),
    ];
    stores[request]!.set(guide, { ...prediction, remarks: [...prediction.remarks, ...cautions] });
    options.onProgress?.(++finished, total);
  });
  try {
    const feed = new Feed(pool);
    const give = async (index: number, walls: Float64Array | null) => {
      const guide = design.guides[index]!;
      for (const [k, request] of setup.requests.entries()) {
        const resolved = resolveGuide(pools, windows, guide, request.checked, walls, along);
        roles[k]!.push({ guide, roles: resolved.roles });
        await feed.add({ request: k, guide: index, inputs: resolved.inputs });
      }
    };
    const exact = completeWalls(traits);
    const position = new Map(design.guides.map((g, k) => [g.guide_id, k]));
    for (const [index, guide] of design.guides.entries()) {
      if (!exact.has(guide.guide_id)) await give(index, null);
    }
    if (exact.size > 0) {
      for await (const walls of streamWalls(ledger, lot)) {
        if (exact.get(walls.guide_id) !== walls.refs[0]!.file_name) continue;
        await give(position.get(walls.guide_id)!, walls.positions_um);
      }
    }
    await feed.flush();
    await pool.finish();
  } finally {
    pool.close();
  }
  return { stores, roles, unavailable, designRuns, pools };
}

/** Gathers jobs into batches: one message per job would cost as much as a small job. */
class Feed {
  #jobs: Job[] = [];
  constructor(readonly pool: JobPool) {}

  async add(job: Job): Promise<void> {
    this.#jobs.push(job);
    if (this.#jobs.length >= BATCH) await this.flush();
  }

  async flush(): Promise<void> {
    if (this.#jobs.length > 0) await this.pool.submit(this.#jobs.splice(0));
  }
}

function roleTable(lot: string, request: string, guides: Computed["roles"][number]) {
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
