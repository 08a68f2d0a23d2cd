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

function textOf(figures: Record<string, unknown>): string {
  const all = Object.fromEntries(FIGURES.map((f) => [f, figures[f] ?? nothing]));
  const entry = { guide: "A/01/g1", decision: "reject", probability: 0, figures: all };
  const request = { request: { process: "second-harmonic" } };
  return budgetText(entry as unknown as RankedEntry, request as unknown as LoadedRequest);
}

Deno.test("budgetText() does not call the nearest temperature one of operation", () => {
  const matched = textOf({ operating_temperature_c: value(41.2), operating_pump_nm: value(775) });
  assert.match(matched, /^Oven at 41\.2 °C/m);
  const unmatched = textOf({ operating_temperature_c: value(90) });
  assert.doesNotMatch(unmatched, /Oven at/);
  assert.match(unmatched, /^Nothing matches in the oven; .* nearest temperature, 90\.0 °C$/m);
});
