import assert from "node:assert/strict";
import { checkLedger, type Finding } from "../../../pipeline/query/check.ts";
import { type Manifest, openLedger } from "../../../pipeline/ledger/mod.ts";
import { sha256 } from "../../../pipeline/ledger/disk.ts";
import { commitFiles, commitTable, withFolder } from "../ledger/a_ledger.ts";

interface Case {
  readonly damage: (folder: string, runs: readonly Manifest[]) => Promise<void>;
  readonly severity: Finding["severity"];
  readonly path: (runs: readonly Manifest[]) => string;
  readonly statement: RegExp;
}

async function findings(damage: Case["damage"]): Promise<[readonly Finding[], readonly Manifest[]]> {
  const runs: Manifest[] = [];
  let found: readonly Finding[] = [];
  await withFolder(async (folder) => {
    {
      await using ledger = await openLedger(folder, { write: true });
      runs.push(await commitFiles(ledger, "K07", [{ name: "a.csv", text: "a", values: [1, 2, 3] }]));
      runs.push(
        await commitTable(
          ledger,
          { kind: "reduce", table: "traits", lot: "K07", parents: [runs[0]!.run] },
          { x: "f64" },
          { x: [1] },
        ),
      );
    }
    await damage(folder, runs);
    await using ledger = await openLedger(folder, { write: false });
    found = (await checkLedger(ledger)).findings;
  });
  return [found, runs];
}

async function flip(path: string, at: number) {
  const content = await Deno.readFile(path);
  content[at < 0 ? content.length + at : at]! ^= 1;
  await Deno.writeFile(path, content);
}

const cases: Record<string, Case> = {
  "a flipped bit in a table": {
    damage: (folder, [run]) => flip(`${folder}/runs/${run!.run}/cutback.parquet`, 30),
    severity: "damage",
    path: ([run]) => `runs/${run!.run}/cutback.parquet`,
    statement: /was changed/,
  },
  "a missing table": {
    damage: (folder, [run]) => Deno.remove(`${folder}/runs/${run!.run}/cutback.parquet`),
    severity: "damage",
    path: ([run]) => `runs/${run!.run}/cutback.parquet`,
    statement: /missing/,
  },
  "a changed original": {
    damage: (folder) => flip(`${folder}/originals/${sha256("a")}`, 0),
    severity: "damage",
    path: () => `originals/${sha256("a")}`,
    statement: /was changed/,
  },
  "a deleted original": {
    damage: (folder) => Deno.remove(`${folder}/originals/${sha256("a")}`),
    severity: "damage",
    path: () => `originals/${sha256("a")}`,
    statement: /missing.*a\.csv/,
  },
  "a flipped bit at the end of a manifest": {
    damage: (folder, [, run]) => flip(`${folder}/runs/${run!.run}/manifest.json`, -2),
    severity: "damage",
    path: ([, run]) => `runs/${run!.run}/manifest.json`,
    statement: /not JSON/,
  },
  "an edited manifest": {
    damage: async (folder, [, run]) => {
      const path = `${folder}/runs/${run!.run}/manifest.json`;
      const text = await Deno.readTextFile(path);
      await Deno.writeTextFile(path, text.replace('"lot": "K07"', '"lot": "K70"'));
    },
    severity: "damage",
    path: ([, run]) => `runs/${run!.run}/manifest.json`,
    statement: /was changed/,
  },
  "a missing run": {
    damage: (folder, [run]) => Deno.remove(`${folder}/runs/${run!.run}`, { recursive: true }),
    severity: "damage",
    path: () => "runs",
    statement: /run number 1 is missing/,
  },
  "a parent that is missing": {
    damage: (folder, [run]) => Deno.remove(`${folder}/runs/${run!.run}`, { recursive: true }),
    severity: "damage",
    path: ([, run]) => `runs/${run!.run}`,
    statement: /parent .* is missing/,
  },
  "an original that no run names": {
    damage: (folder) => Deno.writeTextFile(`${folder}/originals/${sha256("b")}`, "b"),
    severity: "note",
    path: () => `originals/${sha256("b")}`,
    statement: /no run names it/,
  },
  "a file that a run does not name": {
    damage: (folder, [run]) => Deno.writeTextFile(`${folder}/runs/${run!.run}/notes.txt`, "b"),
    severity: "note",
    path: ([run]) => `runs/${run!.run}/notes.txt`,
    statement: /does not name it/,
  },
  "a run that was not finished": {
    damage: (folder) => Deno.mkdir(`${folder}/runs/.pending-x`),
    severity: "note",
    path: () => "runs/.pending-x",
    statement: /not finished/,
  },
};

Deno.test("a sound ledger has no findings, and the check says what it read", () =>
  withFolder(async (folder) => {
    await using ledger = await openLedger(folder, { write: true });
    const run = await commitFiles(ledger, "K07", [{ name: "a.csv", text: "abc", values: [1] }]);
    const seen: number[] = [];
    const result = await checkLedger(ledger, (done, of) => seen.push(done / of));
    const bytes = 3 + run.tables.cutback!.bytes;
    assert.deepEqual(result, { findings: [], runs: 1, originals: 1, tables: 1, bytes });
    assert.deepEqual(seen, [0.5, 1]);
  }));

for (const [name, { damage, severity, path, statement }] of Object.entries(cases)) {
  Deno.test(`the check finds ${name}`, async () => {
    const [found, runs] = await findings(damage);
    const hit = found.find((finding) => finding.path === path(runs) && statement.test(finding.statement));
    assert.ok(hit, `found only ${JSON.stringify(found)}`);
    assert.equal(hit.severity, severity);
    if (severity === "note") assert.equal(found.length, 1);
  });
}
