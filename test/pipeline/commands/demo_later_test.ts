// The die of the demo that waits for a reading, end to end: its lot alone, for the one request.
import assert from "node:assert/strict";
import { join } from "node:path";
import { COARSE_GRID, writeDemo } from "../../../fixtures/write_demo.ts";
import {
  laterRun,
  missedSettling,
  settledBy,
  settledText,
  takeLater,
} from "../../../pipeline/commands/demo_later.ts";
import { bringUpToDate } from "../../../pipeline/commands/predictions.ts";
import { ingestFolder } from "../../../pipeline/ingest/mod.ts";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { loadRequestFile } from "../../../pipeline/requests.ts";
import { withFolder } from "../ledger/a_ledger.ts";

Deno.test("a held die is settled by the reading that is worth most, as its truth has it, and only once", () =>
  withFolder(async (root) => {
    const lots = await writeDemo(join(root, "runs"), { grid: COARSE_GRID });
    const { lot, later, folder, laterFolder } = lots.find((l) => l.later !== undefined)!;
    assert.deepEqual(lots.filter((l) => l.later === undefined).map((l) => l.laterFolder), [null, null]);
    const directory = join(root, "ledger");
    const request = await loadRequestFile(`fixtures/requests/${later!.request}.json`);
    const common = { ledger: directory, format: "table", workers: 2 } as const;
    {
      await using ledger = await openLedger(directory, { write: true });
      await ingestFolder(folder, ledger);
      assert.equal(await laterRun(ledger, lot, later!), null);
    }
    await bringUpToDate(common, [lot], [request], { quiet: true });
    await takeLater(directory, laterFolder!);
    // Taken in and not yet predicted: the die is as it was, and every sentence about its reading is missing.
    const between = missedSettling(later!, await settledBy(directory, lot, later!, request), request);
    assert.deepEqual(between.map((s) => s.includes("measured") || s.includes("accepted now")), [true, true]);

    await bringUpToDate(common, [lot], [request], { quiet: true });
    const settled = await settledBy(directory, lot, later!, request);
    assert.deepEqual(missedSettling(later!, settled, request), []);
    assert.ok(settled.readings.length > 2, "several readings were weighed");
    const text = settledText(lot, later!, settled);
    const lines = text.split("\n");
    assert.ok(lines.length <= 12 && lines.every((l) => [...l].length <= 80), text);
    assert.match(text, /for double-1550-film[\s\S]*hold[\s\S]*tuning[\s\S]*accept, /);

    // The folder again, and the older one: nothing new, the reading stays, and the first state can still be seen.
    await takeLater(directory, laterFolder!);
    await takeLater(directory, folder);
    const again = await bringUpToDate(common, [lot], [request], { quiet: true });
    assert.deepEqual(again.map((d) => d.computed), [false]);
    assert.deepEqual(await settledBy(directory, lot, later!, request), settled);

    // What the checks say when a die is not as it should be.
    const wrong = missedSettling(
      { ...later!, kind: "fringes", truth: 300, guide: later!.guide.replace("g03", "g02") },
      settled,
      request,
    );
    assert.equal(wrong.length, 4, wrong.join("; "));
  }));
