import { predictGuide } from "../../models/decision/mod.ts";
import { newPairScratch } from "../../models/pairs/mod.ts";
import { buildModel } from "../platforms.ts";
import type { Job, JobResult, WorkerSetup } from "./jobs.ts";

/** Computes jobs one after the other; what a thread does. */
export function makeRunner({ platform, requests }: WorkerSetup): (jobs: readonly Job[]) => JobResult[] {
  const model = buildModel(platform);
  const scratch = newPairScratch();
  return (jobs) =>
    jobs.map(({ request, guide, inputs }) => {
      const { checked, recorded } = requests[request]!;
      return { request, guide, prediction: predictGuide(model, checked, inputs, { recorded, scratch }) };
    });
}
