import assert from "node:assert/strict";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { commitFiles, commitTable, withFolder } from "./a_ledger.ts";

Deno.test("a ledger opened up to a run is as it stood then: its files, rows and runs in force", () =>
  withFolder(async (folder) => {
    const run = { kind: "reduce", table: "traits", lot: "K07" };
    {
      await using ledger = await openLedger(folder, { write: true });
      await commitFiles(ledger, "K07", [{ name: "a.csv", text: "1", values: [1, 2] }]);
      await commitTable(ledger, run, { x: "f64" }, { x: [1] });
      await commitFiles(ledger, "K07", [{ name: "a.csv", text: "2", values: [30] }]);
      await commitTable(ledger, run, { x: "f64" }, { x: [2] });
    }
    const seen = async (upTo?: number) => {
      await using ledger = await openLedger(folder, {
        write: false,
        ...(upTo === undefined ? {} : { upTo }),
      });
      const values = (await ledger.readActive("cutback", "K07")).flatMap((
        part,
      ) => [...part.table.getChild("value")!]);
      return [values, (await ledger.runsInForce("reduce")).map((r) => r.sequence)];
    };
    assert.deepEqual(await seen(1), [[1, 2], []]);
    assert.deepEqual(await seen(2), [[1, 2], [2]]);
    assert.deepEqual(await seen(3), [[30], [2]]);
    assert.deepEqual(await seen(), [[30], [4]]);
    await assert.rejects(openLedger(folder, { write: true, upTo: 2 }), TypeError);
  }));
