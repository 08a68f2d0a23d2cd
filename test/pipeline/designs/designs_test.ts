import { deepEqual, equal, notDeepEqual, ok, rejects } from "node:assert/strict";
import { join } from "node:path";
import { designsFor } from "../../../pipeline/designs/mod.ts";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { OutOfDate } from "../../../pipeline/out_of_date.ts";
import { loadPlatform } from "../../../pipeline/platforms.ts";
import { predictLot } from "../../../pipeline/predict/predict_lot.ts";
import { reduceLot } from "../../../pipeline/reduce/reduce_lot.ts";
import { loadRequests } from "../../../pipeline/requests.ts";
import { InputError } from "../../../shared/errors.ts";
import { TYPE_TWO } from "../../models/decision/solved_guide.ts";
import { lotJson, REQUESTS, runFiles, writeRequests } from "../../run_folder.ts";
import { Scene } from "../ingest/folder.ts";
import { withFolder } from "../ledger/a_ledger.ts";

/** As coarse as it gets: what is tested is what is solved when. */
const grid = { cells: { x: 16, y: 16 }, wavelengthNodes: 5 };

/** Counts pieces as they are solved. */
function counter() {
  const seen = { pieces: 0 };
  return { seen, onSolving: (done: number) => void (seen.pieces += done > 0 ? 1 : 0) };
}

Deno.test("a design is solved once and kept: asked again, nothing is solved, on any number of threads", () =>
  withFolder(async (folder) => {
    const loaded = await loadPlatform("rb-ktp-zcut");
    const asked = [{ waves: TYPE_TWO, fibres: { signal: 10.4e-6 } }];
    const first = counter();
    const path = join(folder, "ledger");
    let solved;
    {
      await using ledger = await openLedger(path, { write: true });
      solved = await designsFor(ledger, loaded, [3, 3.2, 3], asked, { grid, onSolving: first.onSolving });
      // Per width two polarisations, one area, three waves of which none is like another.
      equal(first.seen.pieces, 2 * (2 + 1 + 3));
      equal(solved.runs.length, 2, "one run per design");
      equal(solved.designs!.tables.length, 2);
      const again = counter();
      const held = await designsFor(ledger, loaded, [3.2, 3], asked, { grid, onSolving: again.onSolving });
      equal(again.seen.pieces, 0);
      deepEqual(held.designs, solved.designs);
      // Another wavelength needs new areas and counts, and no new modes.
      const other = counter();
      const waves = { ...TYPE_TWO, lambdaP: 790e-9, lambdaS: 1580e-9, lambdaI: 1580e-9 };
      await designsFor(ledger, loaded, [3], [{ waves }], { grid, onSolving: other.onSolving });
      equal(other.seen.pieces, 1 + 3);
    }
    {
      await using ledger = await openLedger(path, { write: false });
      deepEqual((await designsFor(ledger, loaded, [3, 3.2], asked, { grid })).designs, solved.designs);
      await rejects(designsFor(ledger, loaded, [3.1], [], { grid }), OutOfDate);
    }
    const threads = await designsFor(null, loaded, [3, 3.2], asked, { grid, workers: 2 });
    deepEqual(threads.designs, solved.designs);
    const finer = await designsFor(null, loaded, [3], [], { grid: { ...grid, wavelengthNodes: 6 } });
    notDeepEqual(finer.designs!.tables[0], solved.designs!.tables[0]);
  }));

Deno.test("a platform without solved modes has no designs, and an impossible process names the platform's file", async () => {
  deepEqual(await designsFor(null, await loadPlatform("bulk-ktp"), [3], []), { designs: null, runs: [] });
  const loaded = await loadPlatform("rb-ktp-zcut");
  const index = { ...loaded.platform.index, wavelength_nm: [300, 1750] } as typeof loaded.platform.index;
  await rejects(
    designsFor(null, { ...loaded, platform: { ...loaded.platform, index } }, [3], [], { grid }),
    (error: unknown) =>
      error instanceof InputError && /Cannot use platform .*rb-ktp-zcut\.json/.test(error.message),
  );
});

Deno.test("predicting twice solves nothing the second time; a new request solves its areas alone", async () => {
  await using made = await Scene.make({
    ...runFiles(() => 0.072),
    "lot.json": { ...lotJson(), platform: "rb-ktp-zcut" },
  });
  await made.ingest();
  const folder = join(made.root, "requests");
  const ledger = await made.ledger();
  const predict = async (requests: Record<string, object>) => {
    await writeRequests(folder, requests);
    const { seen, onSolving } = counter();
    await reduceLot(ledger, "Z09", undefined, { grid, onSolving });
    await predictLot(ledger, "Z09", await loadRequests(folder), { workers: 1, grid, onSolving });
    return seen.pieces;
  };
  const { double } = REQUESTS;
  ok(await predict({ double }) > 0);
  equal(await predict({ double }), 0);
  const other = { ...double, request: "other", signal: { ...double.signal, wavelength_nm: 1560 } };
  equal(await predict({ double, other }), 1 + 3);
  equal(await predict({ double, other }), 0);
  const parents = (await ledger.runsInForce("predict")).map((run) =>
    run.parents.filter((p) => p.includes("design"))
  );
  ok(parents.every((p) => p.length > 0), "a prediction names the designs that it rests on");
});
