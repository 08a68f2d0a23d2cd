import { deepEqual, equal, match, ok } from "node:assert/strict";
import type { Capability } from "../../../../models/decision/charts/mod.ts";
import { capabilities } from "../../../../pipeline/query/flag/capability.ts";
import { flagsOf } from "../../../../pipeline/query/flag/evaluate.ts";
import { loadRules } from "../../../../pipeline/query/flag/rules.ts";
import { seriesOf } from "../../../../pipeline/query/flag/series.ts";
import { assertClose } from "../../../assert_close.ts";
import { PLATFORM, simulatedLot } from "./simulated_lots.ts";

const rules = await loadRules();
const only = rules.filter((r) => r.kind === "capability" || r.rule === "duty-off" || r.rule === "loss-high");

Deno.test("capability takes its limits from the trait rules: two-sided for the duty cycle, one-sided for the loss", () => {
  const facts = simulatedLot(1, { wafers: 1, dies: 12 });
  const all = capabilities(facts, rules);
  deepEqual(all.map((c) => [c.series.trait, c.limits]), [
    ["loss_db_cm", { upper: 0.2 + 3 * 0.06 }],
    ["duty", { upper: 0.5 + 2 * 0.04, lower: 0.5 - 2 * 0.04 }],
    ["duty_sd", { upper: 0.05 + 2 * 0.02 }],
    ["titanium_nm", { upper: 100 + 3 * 1.6, lower: 100 - 3 * 1.6 }],
  ]);
  const [series] = seriesOf(facts.traits, ["duty"], PLATFORM);
  const values = series!.dies.map((d) => d.value);
  const m = values.reduce((a, b) => a + b, 0) / 12;
  const s = Math.sqrt(values.reduce((sum, v) => sum + (v - m) ** 2, 0) / 11);
  const found = all[1]!.found as Capability;
  equal(all[1]!.effective, 12);
  assertClose(found.cpk.value, Math.min(0.58 - m, m - 0.42) / (3 * s), { rel: 1e-9 });
  assertClose(found.cp!.value, 0.16 / (6 * s), { rel: 1e-9 });
  equal((all[0]!.found as Capability).cp, null);
});

Deno.test("dies of wafers that differ say less than as many independent ones, and too few say nothing", () => {
  const alike = capabilities(simulatedLot(2, { wafers: 4, dies: 10 }), rules).find((c) =>
    c.series.trait === "duty"
  )!;
  const apart = capabilities(
    simulatedLot(2, {
      wafers: 4,
      dies: 10,
      fault: (trait, g) => trait === "duty" ? 0.2 * Number(g.wafer.at(-1)) : 0,
    }),
    rules,
  );
  const lot = apart.find((c) => c.series.trait === "duty" && c.wafer === null)!;
  ok(
    lot.effective < 4.5 && lot.effective >= 4 && alike.effective > lot.effective,
    `${lot.effective}, ${alike.effective}`,
  );
  match(
    (lot.found as { refused: string }).refused,
    /the 40 dies share their wafers' fates and say as much as 4/,
  );
  equal(
    apart.filter((c) => c.series.trait === "duty" && c.wafer !== null && !("refused" in c.found)).length,
    4,
  );
  const few = capabilities(simulatedLot(3, { wafers: 1, dies: 5 }), rules);
  match((few[0]!.found as { refused: string }).refused, /at least 10 values, found 5/);
});

Deno.test("a wafer that keeps its limits too badly is noted, or watched; one beyond its limit is told as that alone", () => {
  const shifted = (by: number) =>
    flagsOf(
      simulatedLot(5, {
        wafers: 2,
        dies: 14,
        fault: (t, g) => t === "duty" && g.wafer.endsWith("-1") ? by : 0,
      }),
      only,
      [],
    ).filter((f) => f.id === "L005-1");
  const [low, ...none] = shifted(0.05);
  deepEqual(none, []);
  deepEqual([low!.rule, low!.severity], ["capability-low", "note"]);
  match(
    low!.statement,
    /^Wafer L005-1: duty cycle of 14 dies is 0\.5\d+ ± 0\.0\d+ .*limits are at most 0\.58, at least 0\.42: cpk 0\.\d+ \(.* less than 1; of normal dies .* % are beyond/,
  );
  deepEqual(shifted(0).length, 0);
  deepEqual(shifted(0.16).map((f) => f.rule), ["duty-off"]);
});
