import { deepEqual, equal, ok } from "node:assert/strict";
import type { Decision, GuidePrediction } from "../../../models/decision/mod.ts";
import type { Ledger } from "../../../pipeline/ledger/mod.ts";
import { FigureStore } from "../../../pipeline/predict/figure_store.ts";
import { rankGuides, type RankOptions } from "../../../pipeline/query/rank.ts";
import { checkRequest, requestSchema } from "../../../shared/schemas/request.ts";
import { withLedger } from "../ledger/a_ledger.ts";
import { guideRecord } from "../traits/a_lot.ts";

/** Guides in their natural order, each with probability and efficiency; null: the figure does not exist. */
type Made = readonly (readonly [guide: string, probability: number, efficiency: number | null])[];

const prediction = (probability: number, efficiency: number | null): GuidePrediction => ({
  figures: [{
    figure: "efficiency_percent_per_w",
    mean: efficiency,
    u: efficiency === null ? null : 0.1,
    uLinear: null,
    lo: efficiency,
    hi: efficiency,
    probability,
    basis: "measured",
    reason: efficiency === null ? "no phase matching" : null,
  }],
  probability,
  decision: (probability >= 0.9 ? "accept" : probability < 0.1 ? "reject" : "hold") as Decision,
  limitedBy: probability < 1 ? "efficiency_percent_per_w" : null,
  draws: 256,
  settled: true,
  matched: 1,
  otherTemperatures: [31.25, 70],
  pairs: null,
  remarks: ["first: a", "second; with a semicolon"],
});

async function commit(
  ledger: Ledger,
  lot: string,
  made: Made,
  unavailable: Record<string, string> = {},
): Promise<void> {
  const guides = made.map(([id]) => guideRecord(id));
  const store = new FigureStore(lot, "r", guides);
  made.forEach(([, probability, efficiency], k) => store.set(k, prediction(probability, efficiency)));
  await ledger.commit({
    kind: "predict",
    lot,
    inputs: [],
    parents: [],
    parameters: { request: "r" },
    modelVersion: "1",
    fingerprint: lot,
    tables: {
      figures: store.figureTable(),
      decisions: store.decisionTable(new Map(Object.entries(unavailable))),
    },
  });
}

function asking(over: object) {
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
}

const A: Made = [
  ["A-1/1/g1", 0.5, 3],
  ["A-1/1/g2", 0.95, 2],
  ["A-1/1/g10", 0.95, 9],
  ["A-1/2/g1", 1, 1],
  ["A-1/10/g1", 0.95, null],
  ["A-1/11/g1", 1, 5],
];
const B: Made = [["B-1/1/g1", 0.97, 4], ["B-1/1/g2", 0.05, 8]];

Deno.test("dies are ranked by their best guide, ties by id, those that can't be shipped last", () =>
  withLedger(async (ledger) => {
    await commit(ledger, "A", A, { "A-1/11": "cracked" });
    await commit(ledger, "B", B);
    const rank = (over: object, options: Partial<RankOptions> = {}) =>
      rankGuides(ledger, asking(over), { lots: ["A", "B"], allGuides: false, top: null, ...options });

    const byProbability = await rank({});
    equal(byProbability.guides_considered, 8);
    deepEqual(byProbability.dies.map((d) => [d.guide, d.decision, d.qualifying_guides, d.guides_of_die]), [
      ["A-1/2/g1", "accept", 1, 1],
      ["B-1/1/g1", "accept", 1, 2],
      ["A-1/1/g2", "accept", 2, 3], // g2 before g10 at the same probability
      ["A-1/10/g1", "accept", 1, 1],
      ["A-1/11/g1", "reject", 0, 1],
    ]);
    const cracked = byProbability.dies.at(-1)!;
    deepEqual([cracked.unavailable, cracked.probability], ["cracked", 1]);
    ok(!("unavailable" in byProbability.dies[0]!));
    const { other_temperatures_c, remarks, limited_by } = byProbability.dies[2]!;
    deepEqual(other_temperatures_c, [31.25, 70]);
    deepEqual(remarks, ["first: a", "second; with a semicolon"]);
    equal(limited_by, "efficiency_percent_per_w");

    // By a figure: the guide that stands for a die may be another; a figure that does not exist comes after all others.
    const byFigure = await rank({ order_by: "efficiency_percent_per_w" });
    deepEqual(byFigure.dies.map((d) => d.guide), [
      "A-1/1/g10",
      "B-1/1/g2",
      "A-1/2/g1",
      "A-1/10/g1",
      "A-1/11/g1",
    ]);
    const absent = byFigure.dies[3]!.figures.efficiency_percent_per_w;
    deepEqual([absent.mean, absent.u, absent.lo, absent.hi, absent.reason], [
      null,
      null,
      null,
      null,
      "no phase matching",
    ]);
    const upwards = await rank({
      order_by: "efficiency_percent_per_w",
      require: [{ figure: "efficiency_percent_per_w", at_most: 5 }],
    });
    deepEqual(upwards.dies.map((d) => d.guide), [
      "A-1/2/g1",
      "A-1/1/g2",
      "B-1/1/g1",
      "A-1/10/g1",
      "A-1/11/g1",
    ]);

    const all = await rank({}, { allGuides: true });
    deepEqual(all.dies.map((d) => d.guide), [
      "A-1/2/g1",
      "B-1/1/g1",
      "A-1/1/g2",
      "A-1/1/g10",
      "A-1/10/g1",
      "A-1/1/g1",
      "B-1/1/g2",
      "A-1/11/g1",
    ]);
    const some = await rank({}, { lots: ["B"], top: 1, allGuides: true });
    deepEqual([some.guides_considered, some.dies.map((d) => d.guide)], [2, ["B-1/1/g1"]]);
  }));

Deno.test("a figure of another process is null with the reason", () =>
  withLedger(async (ledger) => {
    await commit(ledger, "B", B);
    const { dies } = await rankGuides(ledger, asking({}), { lots: ["B"], allGuides: false, top: null });
    const { purity, acceptance_nm, efficiency_percent_per_w } = dies[0]!.figures;
    deepEqual([purity.mean, purity.reason], [null, "not a figure of second-harmonic"]);
    deepEqual([acceptance_nm.mean, acceptance_nm.reason], [null, "not computed"]);
    deepEqual([efficiency_percent_per_w.mean, efficiency_percent_per_w.probability], [4, 0.97]);
  }));
