import assert from "node:assert/strict";
import type { SolvedDesigns } from "../../../models/guides/mod.ts";
import { couplingRemarks, powerCautions } from "../../../pipeline/predict/cautions.ts";

const notes = { pump_limit_mw: 50, caution: "photorefraction above this" };
const figure = (mean: number) => [{
  figure: "pump_power_at_g2_mw" as const,
  mean,
  u: 0,
  uLinear: null,
  lo: mean,
  hi: mean,
  probability: null,
  basis: "die" as const,
  reason: null,
}];

Deno.test("powerCautions() marks the power of a request and a suggested one above the platform's limit", () => {
  const request = { signal: { average_power_mw: 300 }, idler: { average_power_mw: 50 } };
  assert.deepEqual(powerCautions({ notes }, request, figure(51)), [
    "above_power_limit: the request's signal, 300 mW, is above the platform's 50 mW (photorefraction above this)",
    "above_power_limit: pump_power_at_g2_mw, 51 mW, is above the platform's 50 mW (photorefraction above this)",
  ]);
});

Deno.test("powerCautions() is silent below the limit, and without one", () => {
  assert.deepEqual(powerCautions({ notes }, { signal: { average_power_mw: 50 } }, []), []);
  assert.deepEqual(powerCautions({ notes: {} }, { signal: { average_power_mw: 1e6 } }, figure(1e6)), []);
});

Deno.test("couplingRemarks() tells the solved field's coupling beside the one that is used, where both exist", () => {
  const waves = {
    lambdaP: 791e-9,
    lambdaS: 1582e-9,
    lambdaI: 1582e-9,
    polP: "TE",
    polS: "TE",
    polI: "TM",
  } as const;
  const design = { geometry: { width_um: 3 } } as SolvedDesigns["tables"][number]["design"];
  const output = (pol: "TE" | "TM", result: object) =>
    ({ design, pol, lambda: 1582e-9, result }) as unknown as SolvedDesigns["outputs"][number];
  const designs: SolvedDesigns = {
    tables: [],
    areas: [],
    outputs: [
      output("TE", { cutOff: false, fibres: [{ mfd: 10.4e-6, value: 0.868, depth: 4e-6 }] }),
      output("TM", { cutOff: true, reason: "none" }),
    ],
  };
  const asked = {
    waves,
    request: { signal: { fibre_mfd_um: 10.4 }, idler: { fibre_mfd_um: 10.4 } },
  } as unknown as Parameters<typeof couplingRemarks>[2];
  const figures = ["coupling_signal", "coupling_idler"].map((name) => ({
    ...figure(0.81)[0]!,
    figure: name,
  })) as never;
  assert.deepEqual(couplingRemarks(designs, 3.05, asked, figures), [
    "solved_coupling: the signal's fibre takes 0.868 of the design's solved field; used is the Gaussian estimate of its " +
    "mode size, 0.810",
  ]);
  assert.deepEqual(couplingRemarks(null, 3, asked, figures), []);
  assert.deepEqual(couplingRemarks(designs, 3, asked, []), []);
});
