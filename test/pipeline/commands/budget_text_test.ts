import assert from "node:assert/strict";
import { budgetText } from "../../../pipeline/commands/budget_text.ts";
import type { RankedEntry } from "../../../pipeline/query/rank.ts";
import type { LoadedRequest } from "../../../pipeline/requests.ts";
import { FIGURES } from "../../../shared/schemas/figures.ts";

const nothing = {
  mean: null,
  u: null,
  lo: null,
  hi: null,
  probability: null,
  basis: "platform",
  reason: "r",
};
const value = (mean: number) => ({ ...nothing, mean, u: 0, lo: mean, hi: mean, reason: undefined });

function textOf(figures: Record<string, unknown>, matched = 1, process = "second-harmonic"): string {
  const all = Object.fromEntries(FIGURES.map((f) => [f, figures[f] ?? nothing]));
  const entry = { guide: "A/01/g1", decision: "reject", probability: 0, matched, figures: all };
  const request = { request: { process } };
  return budgetText(entry as unknown as RankedEntry, request as unknown as LoadedRequest);
}

Deno.test("budgetText() tells of how many draws the temperature holds, and that the request gives the detector", () => {
  const figures = { operating_temperature_c: value(41.2), operating_pump_nm: value(775) };
  assert.match(
    textOf(figures, 0.1055),
    /^Oven at 41\.2 °C .*, in the 11 % of the draws that match in the oven$/m,
  );
  assert.doesNotMatch(textOf(figures, 1), /of the draws/);
  const detector = { ...value(0.85), basis: "measured" };
  const budget = textOf(
    { ...figures, detector_signal: detector, coupling_signal: detector },
    1,
    "pair-generation",
  );
  assert.match(budget, /^detector +0\.850 +request/m);
  assert.match(budget, /^coupling +0\.850 +measured/m);
});

Deno.test("budgetText() does not call the nearest temperature one of operation", () => {
  const matched = textOf({ operating_temperature_c: value(41.2), operating_pump_nm: value(775) });
  assert.match(matched, /^Oven at 41\.2 °C/m);
  const unmatched = textOf({ operating_temperature_c: value(90) });
  assert.doesNotMatch(unmatched, /Oven at/);
  assert.match(unmatched, /^Nothing matches in the oven; .* nearest temperature, 90\.0 °C$/m);
});
