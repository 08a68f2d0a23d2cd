import assert from "node:assert/strict";
import { bringUpToDate } from "../../../pipeline/commands/predictions.ts";
import { ingestFolder } from "../../../pipeline/ingest/mod.ts";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { loadRequestFile } from "../../../pipeline/requests.ts";
import { InputError } from "../../../shared/errors.ts";

async function lotFolder(root: string, lot: string, platform: string): Promise<string> {
  const folder = `${root}/${lot}`;
  await Deno.mkdir(`${folder}/readings`, { recursive: true });
  await Deno.writeTextFile(
    `${folder}/lot.json`,
    JSON.stringify({ lot, platform, wafers: [{ wafer: `${lot}-1` }] }),
  );
  await Deno.writeTextFile(
    `${folder}/guides.csv`,
    "wafer,die,x_mm,y_mm,guide,group,width_um,period_um,length_mm,poled_from_mm,poled_length_mm\n" +
      `${lot}-1,01,0,0,g1,A,6,18.9,10,1,8\n`,
  );
  return folder;
}

Deno.test("a request outside the range of one lot's material ends the call with nothing written for any lot", async () => {
  const root = await Deno.makeTempDir();
  try {
    const options = { ledger: `${root}/ledger`, format: "json" as const, workers: 1 };
    {
      await using ledger = await openLedger(options.ledger, { write: true });
      for (const [lot, platform] of [["A1", "bulk-ln"], ["B1", "bulk-ktp"]] as const) {
        await ingestFolder(await lotFolder(root, lot, platform), ledger, {});
      }
    }
    const file = `${root}/r.json`;
    // Idler 3732 nm: within the index of lithium niobate, beyond that of KTP.
    await Deno.writeTextFile(
      file,
      JSON.stringify({
        request: "r",
        process: "difference-frequency",
        polarisations: { pump: "TM", signal: "TM", idler: "TM" },
        pump: { wavelength_nm: 1064, average_power_mw: 10 },
        signal: { wavelength_nm: 1488.2 },
        oven_c: [20, 120],
      }),
    );
    const request = await loadRequestFile(file);
    await assert.rejects(
      bringUpToDate(options, [], [request], { quiet: true }),
      (e: Error) => e instanceof InputError && /bulk-ktp: idler\.wavelength_nm/.test(e.message),
    );
    {
      await using ledger = await openLedger(options.ledger, { write: false });
      assert.deepEqual((await ledger.runs()).map((run) => run.kind), ["ingest", "ingest"]);
    }
    const alone = await bringUpToDate(options, ["A1"], [request], { quiet: true });
    assert.deepEqual(alone.map((p) => [p.lot, p.computed]), [["A1", true]]);
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});
