import { analyseGuide, predictGuide } from "../../models/decision/mod.ts";
import { newPairScratch } from "../../models/pairs/mod.ts";
import { buildModel } from "../platforms.ts";
import type { Job, JobResult, WorkerSetup } from "./jobs.ts";

/** Computes jobs one after the other; what a thread does. */
export function makeRunner(setup: WorkerSetup): (jobs: readonly Job[]) => JobResult[] {
  const model = buildModel(setup.platform);
  const { platform } = setup.platform;
  const scratch = newPairScratch();
  const run = ({ request, guide, inputs, task }: Job): JobResult => {
    const { checked, recorded } = setup.requests[request]!;
    const options = { recorded, scratch };
    if (task.kind === "predict") {
      const prediction = predictGuide(model, checked, inputs, { ...options, ...task });
      return { kind: "predict", request, guide, prediction };
    }
    const question = { ...task, platform, known: setup.known };
    return {
      kind: "analyse",
      request,
      guide,
      analysis: analyseGuide(model, checked, inputs, question, options),
    };
  };
  return (jobs) => jobs.map(run);
}
