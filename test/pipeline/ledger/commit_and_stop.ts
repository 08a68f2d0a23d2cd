// Run as a process of its own by crash_test.ts: commits to the ledger in the first argument and stops for good at the
// stage in the second, saying so on standard output.
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { columnsToBatches, tableSchema } from "../../../pipeline/ledger/columns.ts";
import { bytes } from "./a_ledger.ts";

const [folder, stopAt] = Deno.args as [string, string];

async function stop(stage: string): Promise<void> {
  if (stage !== stopAt) return;
  await Deno.stdout.write(bytes(`${stage}\n`));
  await new Promise((resolve) => setTimeout(resolve, 60_000)); // until it is killed
}

const ledger = await openLedger(folder, { write: true, onStage: stop });
const run = await ledger.begin("ingest");
const original = await run.stageOriginal(bytes("value\n1\n2\n"));
const again = await run.stageOriginal(bytes("first"));
await stop("original staged");
const shape = { file_name: "text", source_file: "text", source_line: "i32", value: "f64" } as const;
const table = run.table("cutback", tableSchema(shape));
const rows = 400_000; // more than one row group: a part of the file is on the disk when it stops
const columns = {
  file_name: Array(rows).fill("new.csv"),
  source_file: Array(rows).fill(original.sha256),
  source_line: Int32Array.from({ length: rows }, (_, i) => i + 2),
  value: Float64Array.from({ length: rows }, (_, i) => i),
};
for (const batch of columnsToBatches(shape, columns)) await table.write(batch);
await stop("rows written");
await run.commit({
  lot: "K07",
  inputs: [
    { name: "new.csv", kind: "cutback", sha256: original.sha256, rows, accepted: rows, quarantined: 0 },
    { name: "copy.csv", kind: "cutback", sha256: again.sha256, rows: 0, accepted: 0, quarantined: 0 },
  ],
  parents: [],
  parameters: {},
  modelVersion: "1",
});
await ledger.close();
