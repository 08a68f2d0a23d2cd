import { deepEqual, equal, ok, rejects } from "node:assert/strict";
import { join } from "node:path";
import { predictLot } from "../../../pipeline/predict/predict_lot.ts";
import { rowsOf } from "../../../pipeline/records.ts";
import { reduceLot } from "../../../pipeline/reduce/reduce_lot.ts";
import { loadRequests } from "../../../pipeline/requests.ts";
import { Scene } from "../ingest/folder.ts";
import { REQUESTS, runFiles, writeRequests } from "../../run_folder.ts";

const LOT = "Z09";
const { double } = REQUESTS;

/** The lot of test/run_folder.ts, taken in; `efficiency` predicts with the requests of its folder. */
async function scene(requests: Record<string, object>) {
  const made = await Scene.make(runFiles(() => 0.072));
  await made.ingest();
  const folder = join(made.root, "requests");
  await writeRequests(folder, requests);
  const predict = async (platforms?: string) => {
    const ledger = await made.ledger();
    const reduced = await reduceLot(ledger, LOT, platforms);
    const done = await predictLot(ledger, LOT, await loadRequests(folder), {
      workers: 1,
      ...(platforms === undefined ? {} : { platforms }),
    });
    return { reduced: reduced.computed, computed: done.map((d) => d.computed), runs: done.map((d) => d.run) };
  };
  const efficiency = async () => {
    const ledger = await made.ledger();
    const run = (await ledger.runsInForce("predict")).find((r) => r.lot === LOT)!;
    const rows = rowsOf(await ledger.readTable(run, "figures"));
    return rows.find((r) => r.guide_id === "Z09-1/01/g2" && r.figure === "efficiency_percent_per_w")!
      .mean as number;
  };
  return { made, folder, predict, efficiency };
}

Deno.test("a request that changes and changes back is computed each time: the newest numbers are in force", async () => {
  const { made, folder, predict, efficiency } = await scene({ double });
  await using _ = made;
  const first = await predict();
  deepEqual([first.reduced, first.computed], [true, [true]]);
  const before = await efficiency();
  deepEqual(await predict(), { reduced: false, computed: [false], runs: first.runs });
  // 0.5 nm away the same oven is at another temperature.
  await writeRequests(folder, { double: { ...double, signal: { ...double.signal, wavelength_nm: 1540 } } });
  deepEqual((await predict()).computed, [true]);
  ok(Math.abs(await efficiency() / before - 1) > 1e-3);
  await writeRequests(folder, { double });
  const back = await predict();
  deepEqual([back.reduced, back.computed], [false, [true]]);
  equal(await efficiency(), before);
});

Deno.test("another platform file under the same name is seen: traits and predictions are made anew", async () => {
  const { made, predict, efficiency } = await scene({ double });
  await using _ = made;
  await predict();
  const before = await efficiency();
  const own = join(made.root, "platforms");
  await Deno.mkdir(own);
  const built = JSON.parse(await Deno.readTextFile("models/platforms/bulk-ktp.json"));
  await Deno.writeTextFile(join(own, "bulk-ktp.json"), JSON.stringify({ ...built, effective_area_um2: 20 }));
  const other = await predict(own);
  deepEqual([other.reduced, other.computed], [true, [true]]);
  ok(Math.abs(await efficiency() / before - 2) < 1e-9, "half the area, twice the efficiency");
  deepEqual((await predict()).computed, [true], "and back");
  equal(await efficiency(), before);
});

Deno.test("a lot that is not there, and one whose readings are not reduced, are refused", async () => {
  const { made, folder } = await scene({ double });
  await using _ = made;
  const ledger = await made.ledger();
  const requests = await loadRequests(folder);
  await rejects(
    predictLot(ledger, "Q1", requests, { workers: 1 }),
    /Unknown lot "Q1": the ledger .* holds Z09/,
  );
  await rejects(predictLot(ledger, LOT, requests, { workers: 1 }), /its readings are not reduced/);
});
