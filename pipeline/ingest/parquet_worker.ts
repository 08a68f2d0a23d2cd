/// <reference no-default-lib="true" />
/// <reference lib="deno.worker" />
// Decodes a Parquet file that came from outside, in a worker of its own. The decoder aborts on some damaged files, in a
// callback of its own that no `catch` reaches, and is unfit for use afterwards: here that ends neither the program nor
// the writing of the run.
import { tableToIPC } from "apache-arrow";
import { openTableFile, type TableFile } from "../ledger/parquet_read.ts";

/** What the worker is asked. */
export type Question =
  | { readonly ask: "open"; readonly path: string }
  | { readonly ask: "group"; readonly group: number };

/** What it says. `ipc` is an Arrow IPC stream: of no rows for `open`, of one row group for `group`. */
export type Answer =
  | { readonly ipc: Uint8Array<ArrayBuffer>; readonly rowGroups: number }
  | { readonly error: string };

let file: TableFile | null = null;

async function answer(question: Question): Promise<Answer> {
  try {
    if (question.ask === "open") file = await openTableFile(question.path);
    const rowGroups = question.ask === "open" ? [] : [question.group];
    const ipc = tableToIPC(await file!.read({ rowGroups }), "stream").slice();
    return { ipc, rowGroups: file!.rowGroups };
  } catch (error) {
    const { cause, message } = error as Error;
    return { error: cause instanceof Error ? cause.message : message };
  }
}

self.onmessage = async ({ data }: MessageEvent<Question>) => {
  const said = await answer(data);
  self.postMessage(said, "ipc" in said ? [said.ipc.buffer] : []);
};

// Where an abort of the decoder comes up. The question it belongs to would wait for ever otherwise.
for (const type of ["error", "unhandledrejection"] as const) {
  self.addEventListener(type, (event) => {
    event.preventDefault();
    self.postMessage({ error: "the decoder gave up on it" } satisfies Answer);
  });
}
