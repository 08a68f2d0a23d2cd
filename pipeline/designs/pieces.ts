import { type SolverDesign, TABLE_GRID, type TableGrid } from "../../models/guides/mod.ts";
import type { Ledger } from "../ledger/mod.ts";
import { OutOfDate } from "../out_of_date.ts";
import { solveTasks } from "./solve.ts";
import { heldPieces, keepPieces, type SolvedPiece } from "./store.ts";
import { type DesignTask, taskKey, type TaskResult } from "./tasks.ts";

export interface SolveSetting {
  /** Threads to solve on. */
  readonly workers?: number;
  /** Pieces solved, of all that were not held; called with (0, n) before the first. */
  readonly onSolving?: (done: number, of: number) => void;
  /** Default: {@link TABLE_GRID}. */
  readonly grid?: TableGrid;
}

/**
 * Results of tasks, in their order, with the ledger's runs that hold them. What the ledger holds is read from it, the
 * rest is solved and kept in it; without a ledger nothing is kept.
 * @throws OutOfDate when something has to be solved and the ledger is open for reading only
 * @throws RangeError as the piece that can't be solved
 */
export async function piecesFor(
  ledger: Ledger | null,
  platform: string,
  tasks: readonly DesignTask[],
  { workers = 1, onSolving, grid = TABLE_GRID }: SolveSetting = {},
): Promise<{ results: TaskResult[]; runs: string[] }> {
  const keys = tasks.map((task) => taskKey(task, grid));
  const { results, runs } = ledger === null
    ? { results: new Map<string, TaskResult>(), runs: [] }
    : await heldPieces(ledger, new Set(keys));
  const missing = [...new Map(keys.map((key, k) => [key, tasks[k]!])).entries()].filter(([key]) =>
    !results.has(key)
  );
  if (missing.length > 0) {
    // Seconds of solving that nothing would keep: whoever asked opens the ledger for writing, and asks again.
    if (ledger !== null && !ledger.writable) throw new OutOfDate("solved modes");
    const keeper = new Keeper(ledger, platform, missing.map(([, task]) => task.design));
    let done = 0;
    onSolving?.(0, missing.length);
    await solveTasks(missing.map(([, task]) => task), grid, workers, async (k, result) => {
      const [key, task] = missing[k]!;
      results.set(key, result);
      onSolving?.(++done, missing.length);
      await keeper.add({ key, task, result });
    });
    runs.push(...keeper.runs);
  }
  return { results: keys.map((key) => results.get(key)!), runs };
}

/** Commits the pieces of a design as soon as the last of them is solved: what takes seconds is not lost with the rest. */
class Keeper {
  readonly runs: string[] = [];
  readonly #open = new Map<SolverDesign, { left: number; pieces: SolvedPiece[] }>();
  #last: Promise<void> = Promise.resolve();

  constructor(
    readonly ledger: Ledger | null,
    readonly platform: string,
    designs: readonly SolverDesign[],
  ) {
    for (const design of designs) {
      const held = this.#open.get(design);
      if (held === undefined) this.#open.set(design, { left: 1, pieces: [] });
      else held.left++;
    }
  }

  async add(piece: SolvedPiece): Promise<void> {
    const held = this.#open.get(piece.task.design)!;
    held.pieces.push(piece);
    if (--held.left > 0 || this.ledger === null) return;
    const ledger = this.ledger;
    this.#last = this.#last.then(async () => {
      this.runs.push(await keepPieces(ledger, this.platform, held.pieces));
    });
    await this.#last;
  }
}
