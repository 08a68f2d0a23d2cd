import assert from "node:assert/strict";
import { fileURLToPath } from "node:url";
import { sha256 } from "../../../pipeline/ledger/disk.ts";
import { numbersOf, openLedger } from "../../../pipeline/ledger/mod.ts";
import { checkLedger } from "../../../pipeline/query/check.ts";
import { commitFiles, everythingIn, withFolder } from "./a_ledger.ts";

const SCRIPT = fileURLToPath(new URL("./commit_and_stop.ts", import.meta.url));

/** Starts the committing process and kills it, without warning, when it says that it is at the stage. */
async function killAt(folder: string, stage: string): Promise<void> {
  const child = new Deno.Command(Deno.execPath(), {
    args: [
      "run",
      "--quiet",
      "--no-check",
      "--allow-read",
      "--allow-write",
      "--allow-env",
      SCRIPT,
      folder,
      stage,
    ],
    stdout: "piped",
    stderr: "inherit",
  }).spawn();
  const reader = child.stdout.pipeThrough(new TextDecoderStream()).getReader();
  const { value } = await reader.read();
  assert.equal(value, `${stage}\n`);
  child.kill("SIGKILL");
  await child.status;
  await reader.cancel();
}

const before = [
  "original staged",
  "started",
  "rows written",
  "tables written",
  "manifest written",
  "originals placed",
];

for (const stage of [...before, "run placed"]) {
  Deno.test(`a writer killed at "${stage}" leaves the ledger whole`, () =>
    withFolder(async (folder) => {
      const isThere = stage === "run placed";
      {
        await using ledger = await openLedger(folder, { write: true });
        await commitFiles(ledger, "K07", [{ name: "old.csv", text: "first", values: [1, 2, 3] }]);
      }
      const clean = await everythingIn(folder);
      await killAt(folder, stage);

      {
        await using reader = await openLedger(folder, { write: false });
        const runs = await reader.runs();
        assert.deepEqual(runs.map((run) => run.sequence), isThere ? [1, 2] : [1]);
        const [part, added] = await reader.readActive("cutback", "K07");
        assert.deepEqual([...numbersOf(part!.table, "value")], [1, 2, 3]);
        assert.equal(added?.table.numRows, isThere ? 400_000 : undefined);
        const { findings } = await checkLedger(reader);
        assert.deepEqual(findings.filter((finding) => finding.severity === "damage"), []);
      }
      {
        // The dead writer's lock is gone with it, and so is what it left when the next writer has been there.
        await using ledger = await openLedger(folder, { write: true });
        if (!isThere) assert.deepEqual(await everythingIn(folder), clean);
        const next = await commitFiles(ledger, "K07", [{ name: "next.csv", text: "next", values: [4] }]);
        assert.equal(next.sequence, isThere ? 3 : 2);
        assert.deepEqual((await checkLedger(ledger)).findings, []);
      }
      // An original that an older run holds is never cleared with the dead writer's.
      assert.equal(await Deno.readTextFile(`${folder}/originals/${sha256("first")}`), "first");
    }));
}
