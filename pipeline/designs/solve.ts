import type { TableGrid } from "../../models/guides/mod.ts";
import { type DesignTask, runTask, type TaskResult } from "./tasks.ts";
import type { FromSolver, ToSolver } from "./worker.ts";

/**
 * Solves pieces on as many threads, in any order; on this thread where only one is wanted.
 * @param onSolved called as each piece is done; awaited before the thread takes its next
 * @throws RangeError as the piece that failed
 */
export async function solveTasks(
  tasks: readonly DesignTask[],
  grid: TableGrid,
  threads: number,
  onSolved: (index: number, result: TaskResult) => Promise<void> | void,
): Promise<void> {
  // The longest first: a table of modes takes seconds, all else a fraction of one.
  const order = tasks.map((_, k) => k).sort((a, b) => weight(tasks[b]!) - weight(tasks[a]!));
  const heavy = tasks.filter((t) => t.kind === "modes").length;
  const useful = Math.min(threads, Math.max(heavy, Math.floor(tasks.length / LIGHT_PER_THREAD)));
  let next = 0;
  if (useful <= 1) {
    for (const k of order) await onSolved(k, runTask(tasks[k]!, grid));
    return;
  }
  const workers = Array.from({ length: useful }, () => {
    return new Worker(new URL("./worker.ts", import.meta.url).href, { type: "module" });
  });
  try {
    await Promise.all(workers.map(async (worker) => {
      while (next < order.length) {
        const k = order[next++]!;
        await onSolved(k, await ask(worker, { task: tasks[k]!, grid }));
      }
    }));
  } finally {
    for (const worker of workers) worker.terminate();
  }
}

/** A thread takes half a second to start: so many light pieces are worth one. */
const LIGHT_PER_THREAD = 8;
const weight = ({ kind }: DesignTask): number => kind === "modes" ? 2 : kind === "output" ? 0 : 1;

function ask(worker: Worker, question: ToSolver): Promise<TaskResult> {
  return new Promise((resolve, reject) => {
    worker.onmessage = ({ data }: MessageEvent<FromSolver>) => {
      if ("result" in data) resolve(data.result);
      else reject(data.range ? new RangeError(data.message) : new Error(data.message));
    };
    worker.onerror = (event) => {
      event.preventDefault();
      reject(new Error(`A thread that solves modes failed: ${event.message}`));
    };
    worker.postMessage(question);
  });
}
