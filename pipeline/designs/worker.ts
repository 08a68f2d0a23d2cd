/// <reference no-default-lib="true" />
/// <reference lib="deno.worker" />
// A thread that solves pieces of designs, one at a time.
import type { TableGrid } from "../../models/guides/mod.ts";
import { type DesignTask, runTask, type TaskResult } from "./tasks.ts";

export interface ToSolver {
  readonly task: DesignTask;
  readonly grid: TableGrid;
}
export type FromSolver =
  | { readonly result: TaskResult }
  | { readonly message: string; readonly range: boolean };

self.onmessage = ({ data }: MessageEvent<ToSolver>) => {
  let answer: FromSolver;
  try {
    answer = { result: runTask(data.task, data.grid) };
  } catch (error) {
    answer = { message: (error as Error).message, range: error instanceof RangeError };
  }
  self.postMessage(answer);
};
