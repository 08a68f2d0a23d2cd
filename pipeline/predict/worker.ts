/// <reference no-default-lib="true" />
/// <reference lib="deno.worker" />
// A thread of the predict stage.
import type { FromWorker, ToWorker } from "./jobs.ts";
import { makeRunner } from "./runner.ts";

let runner: ReturnType<typeof makeRunner> | null = null;

self.onmessage = ({ data }: MessageEvent<ToWorker>) => {
  if (data.kind === "setup") {
    runner = makeRunner(data.setup);
    return;
  }
  let answer: FromWorker;
  try {
    answer = { kind: "results", batch: data.batch, results: runner!(data.jobs) };
  } catch (error) {
    const { message, stack = "" } = error as Error;
    answer = { kind: "failed", batch: data.batch, message, stack };
  }
  self.postMessage(answer);
};
