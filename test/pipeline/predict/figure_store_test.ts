import { deepEqual, equal, match } from "node:assert/strict";
import { type GuidePrediction } from "../../../models/decision/mod.ts";
import { FigureStore, unavailableDies } from "../../../pipeline/predict/figure_store.ts";
import type { UnavailableRecord } from "../../../pipeline/records.ts";
import { guideRecord, lotDesign } from "../traits/a_lot.ts";

const GUIDES = ["A-1/01/g1", "A-1/01/g2", "A-1/02/g1", "A-1/03/g1"].map((id) => guideRecord(id));
const listed = (die_id: string, reason: string): [string, UnavailableRecord] => [
  die_id,
  { die_id, reason, file_name: "lot.json", source_file: "00", source_line: 1 },
];
const cut = (guide_id: string, length_mm: number) => ({
  guide_id,
  die_id: guide_id.slice(0, guide_id.lastIndexOf("/")),
  length_mm,
});

Deno.test("a die is not for delivery when lot.json lists it, or when it was cut shorter than designed", () => {
  const design = lotDesign({ unavailable: new Map([listed("A-1/03", "broken edge")]) }, GUIDES);
  const dies = unavailableDies(design, [
    cut("A-1/01/g1", 8), // as designed
    cut("A-1/01/g2", 7.9995), // within a micrometre of it
    cut("A-1/02/g1", 8),
    cut("A-1/02/g1", 4),
    cut("A-1/03/g1", 4),
    { guide_id: null, die_id: null, length_mm: 1 }, // a witness of the wafer is no die
  ]);
  deepEqual([...dies.keys()].sort(), ["A-1/02", "A-1/03"]);
  match(dies.get("A-1/02")!, /cut back to 4 mm of 8 mm/);
  equal(dies.get("A-1/03"), "broken edge", "what a person wrote goes before what was inferred");
  const wholeDie = unavailableDies(design, [{ guide_id: null, die_id: "A-1/01", length_mm: 6 }]);
  deepEqual([...wholeDie.keys()], ["A-1/01", "A-1/03"]);
});

Deno.test("a guide on such a die is rejected whatever its probability, and keeps the probability", () => {
  const store = new FigureStore("A", "r", GUIDES.slice(0, 3));
  const prediction: GuidePrediction = {
    figures: [],
    probability: 1,
    decision: "accept",
    limitedBy: null,
    draws: 256,
    settled: true,
    matched: 1,
    otherTemperatures: [],
    pairs: null,
    remarks: [],
  };
  GUIDES.slice(0, 3).forEach((_, k) => store.set(k, prediction));
  const table = store.decisionTable(new Map([["A-1/02", "cut"]]));
  const rows = [...table.batches as Iterable<Iterable<{ toJSON(): Record<string, unknown> }>>]
    .flatMap((batch) => [...batch].map((row) => row.toJSON()));
  deepEqual(rows.map((r) => [r.guide_id, r.decision, r.probability, r.unavailable]), [
    ["A-1/01/g1", "accept", 1, null],
    ["A-1/01/g2", "accept", 1, null],
    ["A-1/02/g1", "reject", 1, "cut"],
  ]);
});
