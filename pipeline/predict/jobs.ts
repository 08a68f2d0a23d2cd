import type {
  AnalysisQuestion,
  GuideAnalysis,
  GuideInputs,
  GuidePrediction,
  KnownReadingU,
  PredictOptions,
  RecordedSpectrum,
} from "../../models/decision/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { PlatformData } from "../platforms.ts";

/** What a worker is told once: the platform, the requests, and how well readings of the lot can tell traits. */
export interface WorkerSetup {
  readonly platform: PlatformData;
  readonly requests: readonly {
    readonly checked: CheckedRequest;
    readonly recorded: RecordedSpectrum | null;
  }[];
  readonly known: KnownReadingU;
}

/** One guide for one request. */
export interface GuideAt {
  /** Position of the request in the setup. */
  readonly request: number;
  /** Position of the guide in the lot. */
  readonly guide: number;
}

/** What is to be done with a guide: predicted (with how many draws), or analysed as it was decided. */
export type Task =
  | ({ readonly kind: "predict" } & Pick<PredictOptions, "size" | "mostDraws">)
  | ({ readonly kind: "analyse" } & Pick<AnalysisQuestion, "decision" | "designWidth_um">);

export interface Job extends GuideAt {
  readonly inputs: GuideInputs;
  readonly task: Task;
}

export type JobResult =
  & GuideAt
  & (
    | { readonly kind: "predict"; readonly prediction: GuidePrediction }
    | { readonly kind: "analyse"; readonly analysis: GuideAnalysis }
  );

export type ToWorker =
  | { readonly kind: "setup"; readonly setup: WorkerSetup }
  | { readonly kind: "jobs"; readonly batch: number; readonly jobs: readonly Job[] };

export type FromWorker =
  | { readonly kind: "results"; readonly batch: number; readonly results: readonly JobResult[] }
  | { readonly kind: "failed"; readonly batch: number; readonly message: string; readonly stack: string };
