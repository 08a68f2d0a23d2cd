import assert from "node:assert/strict";
import type { GuidePrediction } from "../../../models/decision/mod.ts";
import { FigureStore } from "../../../pipeline/predict/figure_store.ts";
import { guidesForLargerSamples } from "../../../pipeline/predict/larger_samples.ts";
import { guidesToAnalyse, representatives } from "../../../pipeline/predict/representatives.ts";
import { checkRequest, requestSchema } from "../../../shared/schemas/request.ts";
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
  guides: readonly {
    id: string;
    p: number;
    settled?: boolean;
    efficiency?: number | null;
    matched?: number;
  }[],
) {
  const store = new FigureStore("A", "r", guides.map((g) => guideRecord(g.id)));
  guides.forEach(({ p, settled = true, efficiency = null, matched = 1 }, k) =>
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
        matched,
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

Deno.test("guidesToAnalyse() lets a guide that matches speak for a die whose first guide matches nowhere", () => {
  const store = storeOf([
    { id: "A-1/01/g1", p: 0, matched: 0 },
    { id: "A-1/01/g2", p: 0, matched: 0.4 },
    { id: "A-1/01/g3", p: 0, matched: 0.9 },
    { id: "A-1/02/g1", p: 0.2, matched: 0.2 },
    { id: "A-1/02/g2", p: 0.2, matched: 1 },
    { id: "A-1/03/g1", p: 0, matched: 0 },
    { id: "A-1/03/g2", p: 0, matched: 0 },
    { id: "A-1/04/g1", p: 0, matched: 0 },
    { id: "A-1/04/g2", p: 0, matched: 1 },
  ]);
  const gone = new Map([["A-1/04", "cut"]]);
  assert.deepEqual(guidesToAnalyse(store, asked(), gone), [2, 3, 5]);
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

Deno.test("guidesForLargerSamples() goes on with guides that have come to stand for their dies, and with no others", () => {
  const store = storeOf([
    // The first was sampled again and fell behind the second, which has its small sample still.
    { id: "A-1/01/g1", p: 0.87 },
    { id: "A-1/01/g2", p: 0.89, settled: false },
    { id: "A-1/01/g3", p: 0.88, settled: false },
    // Sampled again and still open: once is enough.
    { id: "A-1/02/g1", p: 0.9, settled: false },
  ]);
  assert.deepEqual(guidesForLargerSamples(store, asked(), new Map(), new Set([0, 3])), [1]);
  assert.deepEqual(guidesForLargerSamples(store, asked(), new Map(), new Set([0, 1, 3])), []);
});
