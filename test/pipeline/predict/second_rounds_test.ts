import assert from "node:assert/strict";
import type { GuidePrediction } from "../../../models/decision/mod.ts";
import { FigureStore } from "../../../pipeline/predict/figure_store.ts";
import { knownReadingU } from "../../../pipeline/predict/known_readings.ts";
import { guidesForLargerSamples } from "../../../pipeline/predict/larger_samples.ts";
import { representatives } from "../../../pipeline/predict/representatives.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import { checkRequest, requestSchema } from "../../../shared/schemas/request.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";
import { guideRecord } from "../traits/a_lot.ts";

const asked = (over: object = {}) => {
  const checked = checkRequest(requestSchema.parse({
    request: "r",
    process: "second-harmonic",
    polarisations: { pump: "TE", signal: "TE", idler: "TM" },
    signal: { wavelength_nm: 1582 },
    oven_c: [20, 90],
    ...over,
  }));
  if ("problems" in checked) throw new Error(JSON.stringify(checked.problems));
  return checked;
};

function storeOf(
  guides: readonly { id: string; p: number; settled?: boolean; efficiency?: number | null }[],
) {
  const store = new FigureStore("A", "r", guides.map((g) => guideRecord(g.id)));
  guides.forEach(({ p, settled = true, efficiency = null }, k) =>
    store.set(
      k,
      {
        figures: [{
          figure: "efficiency_percent_per_w",
          mean: efficiency,
          u: null,
          uLinear: null,
          lo: null,
          hi: null,
          probability: null,
          basis: "measured",
          reason: null,
        }],
        probability: p,
        decision: p >= 0.9 ? "accept" : p < 0.1 ? "reject" : "hold",
        limitedBy: null,
        draws: 256,
        settled,
        matched: 1,
        otherTemperatures: [],
        pairs: null,
        remarks: [],
      } satisfies GuidePrediction,
    )
  );
  return store;
}

Deno.test("representatives() picks the guide that a ranking shows for a die, and none of dies that can't be shipped", () => {
  const store = storeOf([
    { id: "A-1/01/g1", p: 0.5, efficiency: 3 },
    { id: "A-1/01/g2", p: 0.8, efficiency: null },
    { id: "A-1/02/g1", p: 0.7, efficiency: 1 },
    { id: "A-1/02/g2", p: 0.7, efficiency: 2 },
    { id: "A-1/03/g1", p: 1, efficiency: 9 },
  ]);
  const gone = new Map([["A-1/03", "cut"]]);
  assert.deepEqual(representatives(store, asked(), gone), [1, 2], "ties go to the first guide");
  const byFigure = asked({ order_by: "efficiency_percent_per_w" });
  assert.deepEqual(representatives(store, byFigure, gone), [0, 3], "a figure that does not exist ranks last");
  assert.deepEqual(representatives(store, byFigure, new Map()), [0, 3, 4]);
});

Deno.test("guidesForLargerSamples() takes unsettled guides, and of a whole lot at a threshold no more than one in twenty", () => {
  const few = storeOf([
    { id: "A-1/01/g1", p: 0.9, settled: false },
    { id: "A-1/02/g1", p: 1 },
    { id: "A-1/03/g1", p: 0.88, settled: false },
  ]);
  assert.deepEqual(guidesForLargerSamples(few, asked(), new Map([["A-1/01", "cut"]])), [2]);
  const lot = storeOf(Array.from({ length: 400 }, (_, k) => ({
    id: `A-1/${String(100 + (k >> 1))}/g${1 + k % 2}`,
    // The second guide of each die stands for it; those in the middle of the lot are nearest to 0.9.
    p: 0.9 - 1e-5 * Math.abs(k - 200) - (k % 2 === 0 ? 1e-3 : 0),
    settled: false,
  })));
  const chosen = guidesForLargerSamples(lot, asked(), new Map());
  assert.equal(chosen.length, 20);
  assert.ok(chosen.every((k) => k % 2 === 1 && Math.abs(k - 200) <= 21), chosen.join());
});

Deno.test("knownReadingU() takes the median u of a lot's own readings, then what the platform states, then nothing", () => {
  const platform = platformSchema.parse(
    JSON.parse(Deno.readTextFileSync("models/platforms/bulk-ktp.json")),
  );
  const row = (trait: string, u: number, method: string) => ({ trait, u, method }) as unknown as TraitRow;
  const { byTrait, contrast } = knownReadingU("A", [
    row("loss_db_cm", 0.02, "fringe contrast, bare facets"),
    row("loss_db_cm", 0.04, "fringe contrast, bare facets"),
    row("loss_db_cm", 0.03, "fringe contrast, coated facets"),
    row("loss_db_cm", 9, "cut-back line"),
    row("duty", 0.001, "walls (200)"),
    row("mfd_x_um", 0.1, "mode-field diameter, 1/e² intensity"),
  ], platform);
  assert.deepEqual(byTrait.loss_db_cm, { u: 0.03, from: "median of 3 of lot A" });
  assert.deepEqual(byTrait.mfd_x_um, { u: 0.1, from: "the reading of lot A" });
  assert.deepEqual(byTrait.mfd_y_um, { u: 0.2, from: "the platform's u_mfd_um" });
  assert.equal(byTrait.duty, undefined, "walls are no windows");
  assert.equal(byTrait.mismatch_offset_per_m, undefined);
  assert.equal(contrast, 0.01);
});
