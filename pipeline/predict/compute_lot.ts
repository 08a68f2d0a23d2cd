import { DEFAULT_SAMPLE, type GuidePrediction } from "../../models/decision/mod.ts";
import { askedBy, designsFor } from "../designs/mod.ts";
import type { Ledger, Manifest } from "../ledger/mod.ts";
import type { LoadedPlatform } from "../platforms.ts";
import { type GuideRecord, type LotDesign, recordsOf } from "../records.ts";
import type { LoadedRequest } from "../requests.ts";
import type { RoleTrait } from "../traits/guide_traits.ts";
import { knownReadingU } from "../traits/known_readings.ts";
import { loadTraits } from "../traits/load_traits.ts";
import { loadOtherLots } from "../traits/pooled_lots.ts";
import { TraitPools } from "../traits/pools.ts";
import { AnalysisStore } from "./analysis_store.ts";
import { contradictionRemarks, powerCautions, samplingRemarks } from "./cautions.ts";
import { contradictionsOf, contradictionText } from "./contradictions.ts";
import { FigureStore, unavailableDies } from "./figure_store.ts";
import { GuideSource, type SourcedGuide } from "./guide_source.ts";
import type { GuideAt, Job, JobResult, Task, WorkerSetup } from "./jobs.ts";
import { guidesForLargerSamples, LARGER_ROUNDS, MOST_DRAWS } from "./larger_samples.ts";
import { type JobPool, openPool } from "./pool.ts";
import type { PredictLotOptions } from "./predict_lot.ts";
import { guidesToAnalyse } from "./representatives.ts";

/** Everything that predicting a lot finds, by the position of the request. */
export interface ComputedLot {
  readonly stores: readonly FigureStore[];
  readonly analyses: readonly AnalysisStore[];
  readonly roles: readonly { guide: GuideRecord; roles: readonly RoleTrait[] }[][];
  readonly unavailable: ReadonlyMap<string, string>;
  readonly designRuns: readonly string[];
  readonly pools: TraitPools;
}

/** The first of the larger samples. */
const LARGER = { draws: 4 * DEFAULT_SAMPLE.draws, spectral: 4 * DEFAULT_SAMPLE.spectral };

/**
 * Predicts a lot's guides for requests in three rounds: all guides; those at the edge of a decision with larger samples;
 * and, of dies that can be shipped and whose best guide is not accepted, why and what may help.
 */
export async function computeLot(
  ledger: Ledger,
  design: LotDesign,
  loaded: LoadedPlatform,
  [reduced, ...others]: readonly [Manifest, ...Manifest[]],
  requests: readonly LoadedRequest[],
  options: PredictLotOptions,
): Promise<ComputedLot> {
  const { lot } = design.lot;
  const { guides } = design;
  const { designs, runs: designRuns } = await designsFor(
    ledger,
    loaded,
    guides.map((g) => g.width_um),
    requests.map(askedBy),
    {
      workers: options.workers,
      ...(options.onSolving === undefined ? {} : { onSolving: options.onSolving }),
      ...(options.grid === undefined ? {} : { grid: options.grid }),
    },
  );
  const traits = await loadTraits(ledger, reduced);
  const pools = new TraitPools(loaded.platform, design, traits, await loadOtherLots(ledger, others));
  const source = await GuideSource.open(ledger, design, pools);
  const unavailable = unavailableDies(design, await recordsOf(ledger, "cutback", lot));
  const setup: WorkerSetup = {
    platform: { ...loaded, designs },
    requests: requests.map(asked),
    known: knownReadingU(lot, traits, loaded.platform),
  };
  const checked = setup.requests.map((r) => r.checked);
  const stores = requests.map((r) => new FigureStore(lot, r.name, guides));
  const analyses = checked.map((c) => new AnalysisStore(lot, c));
  const roles: { guide: GuideRecord; roles: readonly RoleTrait[] }[][] = requests.map(() => []);
  let [finished, total] = [0, 0];
  const contradicted = checked.map((c) =>
    contradictionsOf(pools, c).map((found) => ({ unit: found.unit, text: contradictionText(found, pools) }))
  );
  const remarked = ({ request, guide }: GuideAt, prediction: GuidePrediction): GuidePrediction => {
    const { die_id } = guides[guide]!;
    const cautions = [
      ...contradictionRemarks(guides[guide]!, contradicted[request]!),
      ...powerCautions(loaded.platform, requests[request]!.request, prediction.figures),
      ...(unavailable.has(die_id) ? [] : samplingRemarks(prediction)),
    ];
    return { ...prediction, remarks: [...prediction.remarks, ...cautions] };
  };
  const take = (result: JobResult) => {
    const { request, guide } = result;
    const store = stores[request]!;
    if (result.kind === "predict") store.set(guide, remarked(result, result.prediction));
    else analyses[request]!.set(guide, guides[guide]!, store.decision(guide), result.analysis);
    options.onProgress?.(++finished, total);
  };
  const pool = openPool(setup, options.workers, guides.length * requests.length, take);
  const round = async (
    chosen: readonly (readonly number[])[],
    task: (at: GuideAt) => Task,
    onSourced?: (at: SourcedGuide) => void,
  ) => {
    const wanted = new Map<number, number[]>();
    chosen.forEach((list, request) => {
      for (const guide of list) wanted.set(guide, [...wanted.get(guide) ?? [], request]);
      total += list.length;
    });
    // Messages of one job where jobs are large: the threads then end together.
    const feed = new Feed(pool, onSourced === undefined ? 1 : BATCH);
    for await (const at of source.guides(wanted, checked)) {
      onSourced?.(at);
      await feed.add({ request: at.request, guide: at.guide, inputs: at.inputs, task: task(at) });
    }
    await feed.flush();
    await pool.finish();
  };
  try {
    await round(
      requests.map(() => [...guides.keys()]),
      () => ({ kind: "predict" }),
      (at) => roles[at.request]!.push({ guide: guides[at.guide]!, roles: at.roles }),
    );
    const enlarged = requests.map(() => new Set<number>());
    for (let again = 0; again < LARGER_ROUNDS; again++) {
      const chosen = stores.map((store, k) =>
        guidesForLargerSamples(store, checked[k]!, unavailable, enlarged[k])
      );
      if (chosen.every((list) => list.length === 0)) break;
      chosen.forEach((list, k) => list.forEach((guide) => enlarged[k]!.add(guide)));
      await round(chosen, () => ({ kind: "predict", size: LARGER, mostDraws: MOST_DRAWS }));
    }
    await round(
      stores.map((store, k) =>
        guidesToAnalyse(store, checked[k]!, unavailable).filter((guide) => store.decision(guide) !== "accept")
      ),
      ({ request, guide }) => ({
        kind: "analyse",
        decision: stores[request]!.decision(guide),
        designWidth_um: guides[guide]!.width_um,
      }),
    );
  } finally {
    pool.close();
  }
  return { stores, analyses, roles, unavailable, designRuns, pools };
}

/** What a thread needs of a request; no more can be sent to it. */
const asked = (
  { request, waves, processKey, pulsed, requirements, orderBy, descending, spectrum }: LoadedRequest,
): WorkerSetup["requests"][number] => ({
  checked: { request, waves, processKey, pulsed, requirements, orderBy, descending },
  recorded: spectrum,
});

const BATCH = 4;

/** Gathers jobs into batches: one message per job would cost as much as a small job. */
class Feed {
  #jobs: Job[] = [];
  constructor(readonly pool: JobPool, readonly batch: number) {}

  async add(job: Job): Promise<void> {
    this.#jobs.push(job);
    if (this.#jobs.length >= this.batch) await this.flush();
  }

  async flush(): Promise<void> {
    if (this.#jobs.length > 0) await this.pool.submit(this.#jobs.splice(0));
  }
}
