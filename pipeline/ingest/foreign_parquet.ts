import { type RecordBatch, type Schema, tableFromIPC } from "apache-arrow";
import { InputError } from "../../shared/errors.ts";
import type { Answer, Question } from "./parquet_worker.ts";

/** A Parquet file from outside, open for reading. */
export interface ForeignParquet extends Disposable {
  readonly schema: Schema;
  readonly rowGroups: number;
  /** Batches of one row group. */
  read(group: number): Promise<readonly RecordBatch[]>;
}

/**
 * Opens a Parquet file that need not be what it says, in a worker.
 * @param name the file as the user knows it
 * @throws InputError (from `read` too) when it cannot be decoded
 */
export async function openForeignParquet(path: string, name: string): Promise<ForeignParquet> {
  const worker = new Worker(import.meta.resolve("./parquet_worker.ts"), { type: "module" });
  const broken = (why: string): InputError =>
    new InputError(
      `Cannot read ${name}: it is no whole Parquet file (${why}); export it again, or write it as walls.csv`,
      { file: name },
    );
  async function ask(question: Question) {
    const { promise, resolve, reject } = Promise.withResolvers<Answer>();
    worker.onmessage = ({ data }: MessageEvent<Answer>) => resolve(data);
    worker.onerror = (event) => {
      event.preventDefault(); // the worker's end is not the program's
      reject(broken("the decoder gave up on it"));
    };
    worker.postMessage(question);
    const answer = await promise;
    if ("error" in answer) throw broken(answer.error);
    return { table: tableFromIPC(answer.ipc), rowGroups: answer.rowGroups };
  }
  try {
    const { table, rowGroups } = await ask({ ask: "open", path });
    return {
      schema: table.schema,
      rowGroups,
      read: async (group) => (await ask({ ask: "group", group })).table.batches,
      [Symbol.dispose]: () => worker.terminate(),
    };
  } catch (error) {
    worker.terminate();
    throw error;
  }
}
