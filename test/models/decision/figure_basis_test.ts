import { equal } from "node:assert/strict";
import { basisOf, type GuideInputs, RESTS_ON } from "../../../models/decision/mod.ts";
import { type Figure, FIGURES } from "../../../shared/schemas/figures.ts";
import type { Basis } from "../../../shared/vocabulary.ts";
import { guide, trait } from "./a_guide.ts";

const of = (basis: Basis) => ({ ...trait(0.5, 0.1, basis), basis });
const measured: GuideInputs = {
  ...guide,
  pumpLoss: of("measured"),
  signal: {
    loss: of("measured"),
    mode: { x: of("measured"), y: of("measured") },
    facet: { state: "coated", reflectivity: of("measured") },
  },
  idler: {
    loss: of("measured"),
    mode: { x: of("measured"), y: of("measured") },
    facet: { state: "coated", reflectivity: of("measured") },
  },
  poling: { from: "walls", walls: new Float64Array(0), basis: "measured" },
};

Deno.test("a figure's basis is the weakest of the traits that it rests on", () => {
  const cases: readonly (readonly [GuideInputs, Partial<Record<Figure, Basis>>])[] = [
    [measured, { heralding_signal: "measured", purity: "measured", survival_idler: "measured" }],
    [{ ...measured, pumpLoss: of("wafer") }, {
      purity: "wafer",
      pairs_per_pulse: "wafer",
      survival_signal: "wafer",
      facet_signal: "measured",
      loss_db_cm_signal: "measured",
    }],
    [{ ...measured, signal: { ...measured.signal, loss: of("lot") } }, {
      loss_db_cm_signal: "lot",
      loss_db_cm_idler: "measured",
      survival_idler: "lot",
      heralding_idler: "lot",
      purity: "measured",
      car: "lot",
    }],
    [{ ...measured, idler: { ...measured.idler, mode: { x: of("measured"), y: of("platform") } } }, {
      coupling_idler: "platform",
      heralding_idler: "platform",
      coupling_signal: "measured",
      g2_heralded: "platform",
    }],
    [{
      ...measured,
      signal: { ...measured.signal, facet: { state: "coated", reflectivity: of("platform") } },
    }, {
      facet_signal: "platform",
      heralding_signal: "platform",
      facet_idler: "measured",
    }],
    [{ ...measured, poling: { from: "duty", duty: of("die"), dutySd: of("lot"), merged: of("wafer") } }, {
      purity: "lot",
      filter_signal: "lot",
    }],
    [{ ...measured, offset: of("measured") }, { operating_temperature_c: "measured" }],
    // The centre is calculated from the platform's index unless a scan of the guide says where it lies.
    [{ ...guide, offset: null }, { operating_temperature_c: "platform" }],
  ];
  for (const [inputs, expected] of cases) {
    for (const [figure, basis] of Object.entries(expected)) {
      equal(basisOf(figure as Figure, inputs), basis, figure);
    }
  }
});

Deno.test("what a request gives rests on no trait; everything else rests on something", () => {
  const given: readonly Figure[] = [
    "window_signal_nm",
    "window_idler_nm",
    "detector_signal",
    "detector_idler",
  ];
  for (const figure of FIGURES) equal(RESTS_ON[figure].length === 0, given.includes(figure), figure);
});
