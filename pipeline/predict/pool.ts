import type { FromWorker, Job, JobResult, WorkerSetup } from "./jobs.ts";
import { makeRunner } from "./runner.ts";

/** Computes batches of jobs on one or more threads; the results do not depend on how many there are. */
export interface JobPool {
  /** Resolves when the batch has been taken by a thread: at most two batches per thread wait. */
  submit(jobs: readonly Job[]): Promise<void>;
  /** Waits for all batches. @throws the first error of any */
  finish(): Promise<void>;
  close(): void;
}

/** Threads that do better than one: each costs about half a second to start. */
const LEAST_JOBS_PER_THREAD = 8;
const WAITING_PER_THREAD = 2;

/** @param jobs how many are expected in all @param onResult called on the main thread, in any order */
export function openPool(
  setup: WorkerSetup,
  threads: number,
  jobs: number,
  onResult: (result: JobResult) => void,
): JobPool {
  const useful = Math.min(threads, Math.floor(jobs / LEAST_JOBS_PER_THREAD));
  return useful <= 1 ? inProcess(setup, onResult) : threaded(setup, useful, onResult);
}

function inProcess(setup: WorkerSetup, onResult: (result: JobResult) => void): JobPool {
  const run = makeRunner(setup);
  return {
    async submit(jobs) {
      for (const job of jobs) {
        run([job]).forEach(onResult);
        await Promise.resolve();
      }
    },
    finish: () => Promise.resolve(),
    close() {},
  };
}

function threaded(setup: WorkerSetup, threads: number, onResult: (result: JobResult) => void): JobPool {
  const waiting: (() => void)[] = [];
  let error: Error | null = null;
  let batches = 0;
  let open = 0;
  const wake = () => {
    for (const go of waiting.splice(0)) go();
  };
  const fail = (cause: Error) => {
    error ??= cause;
    wake();
  };
  const workers = Array.from({ length: threads }, () => {
    const worker = new Worker(new URL("./worker.ts", import.meta.url).href, { type: "module" });
    const held = { worker, busy: 0 };
    worker.onmessage = ({ data }: MessageEvent<FromWorker>) => {
      held.busy--;
      open--;
      if (data.kind === "results") data.results.forEach(onResult);
      else fail(Object.assign(new Error(data.message), { stack: data.stack }));
      wake();
    };
    worker.onerror = (event) => {
      event.preventDefault();
      fail(new Error(`A thread of the predict stage failed: ${event.message}`));
    };
    worker.postMessage({ kind: "setup", setup });
    return held;
  });
  return {
    async submit(jobs) {
      for (;;) {
        if (error !== null) throw error;
        const free = workers.reduce((a, b) => b.busy < a.busy ? b : a);
        if (free.busy < WAITING_PER_THREAD) {
          free.busy++;
          open++;
          free.worker.postMessage({ kind: "jobs", batch: batches++, jobs });
          return;
        }
        await new Promise<void>((go) => waiting.push(go));
      }
    },
    async finish() {
      while (open > 0 && error === null) await new Promise<void>((go) => waiting.push(go));
      if (error !== null) throw error;
    },
    close() {
      for (const { worker } of workers) worker.terminate();
    },
  };
}
