import assert from "node:assert/strict";
import { contradictionRemarks, powerCautions } from "../../../pipeline/predict/cautions.ts";

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

Deno.test("a contradicted reading is a remark on the guide or die that it is of, and on no neighbour", () => {
  const found = [
    { unit: "A-1/06/g1", text: "A-1/06/g1: loss_db_cm of 0.8 contradicts" },
    { unit: "A-1/07", text: "A-1/07: duty of 0.9 contradicts" },
  ];
  const of = (guide_id: string, die_id: string) => contradictionRemarks({ guide_id, die_id }, found);
  assert.deepEqual(of("A-1/06/g1", "A-1/06"), [
    "contradicted_reading: A-1/06/g1: loss_db_cm of 0.8 contradicts",
  ]);
  assert.deepEqual(of("A-1/06/g2", "A-1/06"), []);
  assert.equal(of("A-1/07/g1", "A-1/07").length, 1);
});
