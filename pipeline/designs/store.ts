import { SOLVER_VERSION } from "../../models/guides/mod.ts";
import { sha256 } from "../json_file.ts";
import { type Ledger, type TableShape, tableStream } from "../ledger/mod.ts";
import { MODEL_VERSION } from "../model_version.ts";
import { rowsOf } from "../records.ts";
import type { DesignTask, TaskResult } from "./tasks.ts";

/** A solved piece as a row: its key, what it is, and the numbers as JSON. */
const SOLVED_SHAPE = {
  key: "text",
  kind: "text",
  profile: "text",
  width_um: "f64",
  solved: "text",
} as const satisfies TableShape;

export interface SolvedPiece {
  readonly key: string;
  readonly task: DesignTask;
  readonly result: TaskResult;
}

/** Pieces that the ledger holds, of those asked for, and the runs that hold them. */
export async function heldPieces(
  ledger: Ledger,
  keys: ReadonlySet<string>,
): Promise<{ results: Map<string, TaskResult>; runs: string[] }> {
  const results = new Map<string, TaskResult>();
  const runs: string[] = [];
  for (const run of await ledger.runs()) {
    if (run.kind !== "design") continue;
    const held = (run.parameters as { keys?: readonly string[] }).keys ?? [];
    if (!held.some((key) => keys.has(key) && !results.has(key))) continue;
    for (const row of rowsOf(await ledger.readTable(run, "solved_designs"))) {
      const key = row.key as string;
      if (keys.has(key)) results.set(key, JSON.parse(row.solved as string) as TaskResult);
    }
    runs.push(run.run);
  }
  return { results, runs };
}

/** Keeps the pieces of one design as a run of their own. @returns its name */
export async function keepPieces(
  ledger: Ledger,
  platform: string,
  pieces: readonly SolvedPiece[],
): Promise<string> {
  const keys = pieces.map((p) => p.key);
  const run = await ledger.commit({
    kind: "design",
    inputs: [],
    parents: [],
    parameters: { platform, solver_version: SOLVER_VERSION, design: pieces[0]!.task.design, keys },
    modelVersion: MODEL_VERSION,
    fingerprint: sha256(JSON.stringify([SOLVER_VERSION, keys])),
    tables: {
      solved_designs: tableStream(SOLVED_SHAPE, {
        key: keys,
        kind: pieces.map((p) => p.task.kind),
        profile: pieces.map((p) => p.task.design.process.profile),
        width_um: pieces.map((p) => p.task.design.geometry.width_um),
        solved: pieces.map((p) => JSON.stringify(p.result)),
      }),
    },
  });
  return run.run;
}
