import type { GuideInputs, GuidePrediction, RecordedSpectrum } from "../../models/decision/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { PlatformData } from "../platforms.ts";

/** What a worker is told once: the platform and the requests. */
export interface WorkerSetup {
  readonly platform: PlatformData;
  readonly requests: readonly {
    readonly checked: CheckedRequest;
    readonly recorded: RecordedSpectrum | null;
  }[];
}

/** One guide for one request. */
export interface Job {
  /** Position of the request in the setup. */
  readonly request: number;
  /** Position of the guide in the lot. */
  readonly guide: number;
  readonly inputs: GuideInputs;
}

export interface JobResult {
  readonly request: number;
  readonly guide: number;
  readonly prediction: GuidePrediction;
}

export type ToWorker =
  | { readonly kind: "setup"; readonly setup: WorkerSetup }
  | { readonly kind: "jobs"; readonly batch: number; readonly jobs: readonly Job[] };

export type FromWorker =
  | { readonly kind: "results"; readonly batch: number; readonly results: readonly JobResult[] }
  | { readonly kind: "failed"; readonly batch: number; readonly message: string; readonly stack: string };
