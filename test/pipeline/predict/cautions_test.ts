import assert from "node:assert/strict";
import { powerCautions } from "../../../pipeline/predict/cautions.ts";

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
