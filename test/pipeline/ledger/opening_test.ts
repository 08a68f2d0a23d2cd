import assert from "node:assert/strict";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { commitFiles, everythingIn, withFolder } from "./a_ledger.ts";

const readsOrWrites = [{ write: false }, { write: true }];

Deno.test("reading a ledger that is not there says to take something in first", () =>
  withFolder(async (folder) => {
    for (const path of [`${folder}/none`, folder]) {
      await assert.rejects(openLedger(path, { write: false }), {
        name: "InputError",
        exitCode: 2,
        message: /ingest/,
      });
    }
    assert.deepEqual(await everythingIn(folder), []);
  }));

Deno.test("a file in place of the ledger is the caller's mistake", () =>
  withFolder(async (folder) => {
    await Deno.writeTextFile(`${folder}/file`, "mine");
    for (const options of readsOrWrites) {
      for (const path of [`${folder}/file`, `${folder}/file/below`]) {
        await assert.rejects(openLedger(path, options), { name: "InputError", exitCode: 2 });
      }
    }
    assert.equal(await Deno.readTextFile(`${folder}/file`), "mine");
  }));

Deno.test("a folder with other things in it does not become a ledger", () =>
  withFolder(async (folder) => {
    await Deno.writeTextFile(`${folder}/thesis.tex`, "mine");
    await assert.rejects(openLedger(folder, { write: true }), { name: "InputError", message: /thesis\.tex/ });
    assert.deepEqual(await everythingIn(folder), ["thesis.tex"]);
  }));

Deno.test("a ledger that was opened and got no run leaves no trace", () =>
  withFolder(async (folder) => {
    for (const path of [`${folder}/new`, folder]) {
      const ledger = await openLedger(path, { write: true });
      await ledger.stageOriginal(new Uint8Array(10));
      await ledger.begin("ingest");
      await ledger.close();
      assert.deepEqual(await everythingIn(folder), []);
    }
  }));

Deno.test("a second writer is told who holds the ledger; readers go on", () =>
  withFolder(async (folder) => {
    const now = () => new Date("2026-09-14T08:00:00Z");
    const first = await openLedger(folder, { write: true, now });
    await commitFiles(first, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
    await assert.rejects(openLedger(folder, { write: true }), {
      name: "LedgerError",
      exitCode: 3,
      message: new RegExp(`locked by process ${Deno.pid} since 2026-09-14T08:00:00.000Z`),
    });
    await using reader = await openLedger(folder, { write: false });
    assert.equal((await reader.runs()).length, 1);
    await first.close();
    const second = await openLedger(folder, { write: true });
    await second.close();
  }));

Deno.test("a lock file that nobody holds is no lock", () =>
  withFolder(async (folder) => {
    {
      await using ledger = await openLedger(folder, { write: true });
      await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
    }
    assert.match(await Deno.readTextFile(`${folder}/.lock`), /^process/);
    const again = await openLedger(folder, { write: true });
    await again.close();
  }));

Deno.test("a ledger whose lock can't be taken is a ledger's trouble", () =>
  withFolder(async (folder) => {
    {
      await using ledger = await openLedger(folder, { write: true });
      await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
    }
    await Deno.remove(`${folder}/.lock`);
    await Deno.mkdir(`${folder}/.lock`);
    await assert.rejects(openLedger(folder, { write: true }), { name: "LedgerError", exitCode: 3 });
  }));

const existing = await Deno.makeTempDir({ prefix: "wavelot-test-" });
{
  await using ledger = await openLedger(existing, { write: true });
  await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1] }]);
}
globalThis.addEventListener("unload", () => Deno.removeSync(existing, { recursive: true }));

Deno.test({
  name: "a ledger that may not be written is a ledger's trouble, a new one that may not be made the caller's",
  permissions: { read: true, write: false, env: true, sys: true },
  fn: async () => {
    await assert.rejects(openLedger(existing, { write: true }), { name: "LedgerError", exitCode: 3 });
    await assert.rejects(openLedger(`${existing}-new`, { write: true }), { name: "InputError", exitCode: 2 });
    await using reader = await openLedger(existing, { write: false });
    assert.equal((await reader.runs()).length, 1);
  },
});
