import assert from "node:assert/strict";
import { type Manifest, openLedger } from "../../../pipeline/ledger/mod.ts";
import { sha256 } from "../../../pipeline/ledger/disk.ts";
import { nameManifest } from "../../../pipeline/ledger/manifest.ts";
import { openTableFile } from "../../../pipeline/ledger/parquet_read.ts";
import { commitFiles, withFolder } from "./a_ledger.ts";

/** Makes a ledger of two runs, lets `damage` loose on it, and gives it to `use` as a reader finds it. */
const damaged = (
  damage: (folder: string, runs: readonly Manifest[]) => Promise<void>,
  use: (folder: string, runs: readonly Manifest[]) => Promise<void>,
) =>
  withFolder(async (folder) => {
    const runs: Manifest[] = [];
    {
      await using ledger = await openLedger(folder, { write: true });
      const values = Array.from({ length: 5000 }, (_, i) => i / 7);
      runs.push(await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values }]));
      runs.push(await commitFiles(ledger, "K07", [{ name: "b.csv", text: "b", values: [4] }]));
    }
    await damage(folder, runs);
    await use(folder, runs);
  });

const tablePath = (folder: string, run: Manifest) => `${folder}/runs/${run.run}/cutback.parquet`;
const manifestPath = (folder: string, run: Manifest) => `${folder}/runs/${run.run}/manifest.json`;

async function rewrite(path: string, change: (bytes: Uint8Array) => Uint8Array) {
  await Deno.writeFile(path, change(await Deno.readFile(path)));
}

const damages: Record<string, (bytes: Uint8Array) => Uint8Array> = {
  "a flipped bit in a column": (bytes) => {
    bytes[2000]! ^= 4;
    return bytes;
  },
  "a cut file": (bytes) => bytes.slice(0, bytes.length / 2),
  "an empty file": () => new Uint8Array(0),
  "another file": () => new TextEncoder().encode("no Parquet at all, but long enough to hold a footer"),
};

for (const [name, damage] of Object.entries(damages)) {
  Deno.test(`${name} in place of a table is an error that names the file`, () =>
    damaged(
      (folder, [run]) => rewrite(tablePath(folder, run!), damage),
      async (folder, [run, sound]) => {
        await using ledger = await openLedger(folder, { write: false });
        const expected = {
          name: "LedgerError",
          exitCode: 3,
          message: new RegExp(`${run!.run}/cutback\\.parquet`),
        };
        await assert.rejects(ledger.readTable(run!, "cutback"), expected);
        await assert.rejects(ledger.readActive("cutback", "K07"), expected);
        await assert.rejects(Array.fromAsync(ledger.streamTable(run!, "cutback")), expected);
        assert.equal((await ledger.readTable(sound!, "cutback")).numRows, 1);
      },
    ));
}

Deno.test("a missing table is an error that names the file", () =>
  damaged(
    (folder, [run]) => Deno.remove(tablePath(folder, run!)),
    async (folder, [run]) => {
      await using ledger = await openLedger(folder, { write: false });
      await assert.rejects(ledger.readTable(run!, "cutback"), {
        name: "LedgerError",
        message: /cutback\.parquet/,
      });
    },
  ));

Deno.test("the decoder itself refuses what is no whole Parquet file", () =>
  withFolder(async (folder) => {
    for (const content of ["", "PAR1", "x".repeat(10_000), `${"x".repeat(1000)}PAR1`]) {
      await Deno.writeTextFile(`${folder}/x.parquet`, content);
      await assert.rejects(openTableFile(`${folder}/x.parquet`), {
        name: "LedgerError",
        message: /x\.parquet/,
      });
    }
  }));

const manifestDamages: Record<string, (text: string) => string> = {
  "cut in the middle": (text) => text.slice(0, text.length / 2),
  "empty": () => "",
  "with a field that nobody knows": (text) => text.replace('"format": 1', '"format": 1, "checked": true'),
  "of a later format": (text) => text.replace('"format": 1', '"format": 2'),
  "with a changed count": (text) => text.replace('"rows": 5000', '"rows": 5001'),
  "with another lot": (text) => text.replace('"lot": "K07"', '"lot": "K08"'),
  "with another hash": (text) => text.replace(/"sha256": "./, '"sha256": "f'),
};

for (const [name, damage] of Object.entries(manifestDamages)) {
  Deno.test(`a manifest ${name} is an error that names it, for readers and writers`, () =>
    damaged(
      async (folder, [run]) => {
        const path = manifestPath(folder, run!);
        const text = await Deno.readTextFile(path);
        assert.notEqual(damage(text), text);
        await Deno.writeTextFile(path, damage(text));
      },
      async (folder, [run]) => {
        const expected = { name: "LedgerError", message: new RegExp(`${run!.run}/manifest\\.json`) };
        await using ledger = await openLedger(folder, { write: false });
        await assert.rejects(ledger.runs(), expected);
        await assert.rejects(openLedger(folder, { write: true }), expected);
      },
    ));
}

Deno.test("a manifest that was changed and hashed anew no longer fits its folder", () =>
  damaged(
    async (folder, [run]) => {
      const { run: _, ...parts } = run!;
      const forged = nameManifest({ ...parts, lot: "K08" });
      assert.notEqual(forged.run, run!.run);
      await Deno.writeTextFile(manifestPath(folder, run!), JSON.stringify(forged));
    },
    async (folder, [run]) => {
      await using ledger = await openLedger(folder, { write: false });
      await assert.rejects(ledger.runs(), {
        name: "LedgerError",
        message: new RegExp(`the folder is "${run!.run}"`),
      });
    },
  ));

Deno.test("a missing run is noticed by the gap in the numbers", () =>
  damaged(
    (folder, [run]) => Deno.remove(`${folder}/runs/${run!.run}`, { recursive: true }),
    async (folder) => {
      await using ledger = await openLedger(folder, { write: false });
      await assert.rejects(ledger.activeFiles(), { name: "LedgerError", message: /run number 1 is missing/ });
    },
  ));

Deno.test("files that other programs put into the ledger do not matter", () =>
  damaged(
    async (folder) => {
      await Deno.writeTextFile(`${folder}/runs/.DS_Store`, "x");
      await Deno.mkdir(`${folder}/runs/my notes`);
      await Deno.writeTextFile(`${folder}/originals/desktop.ini`, "x");
    },
    async (folder, runs) => {
      await using ledger = await openLedger(folder, { write: true });
      assert.deepEqual((await ledger.runs()).map((run) => run.run), runs.map((run) => run.run));
      assert.equal(await Deno.readTextFile(ledger.originalPath(sha256("a"))), "a");
    },
  ));
