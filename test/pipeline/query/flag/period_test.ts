import { deepEqual, equal, match, ok } from "node:assert/strict";
import { flagsOf } from "../../../../pipeline/query/flag/evaluate.ts";
import type { LotFacts } from "../../../../pipeline/query/flag/facts.ts";
import { pooledWindows } from "../../../../pipeline/query/flag/period.ts";
import { loadRules } from "../../../../pipeline/query/flag/rules.ts";
import type { GuideRecord, PolingRecord } from "../../../../pipeline/records.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { simulatedLot, SOURCE } from "./simulated_lots.ts";

const rules = (await loadRules()).filter((r) => r.kind === "period_off");

/** A lot drawn with four periods, two windows of 60 periods on every second guide, made as `ratio` says. */
function poled(number: number, ratio: (guide: GuideRecord) => number): LotFacts {
  const lot = simulatedLot(number, { wafers: 2, dies: 6, guides: 4 });
  const guides = lot.design.guides.map((g, k) => ({ ...g, period_um: 16.8 + 0.2 * (k % 4) }));
  const design = { ...lot.design, guides, guideById: new Map(guides.map((g) => [g.guide_id, g])) };
  const random = randomFrom(`poled ${number}`);
  const windows = guides.flatMap((g) =>
    [3, 9].map((at, k): PolingRecord => {
      const length = 60.5 * g.period_um;
      const merged = random.uniform() < 0.3 ? 1 : 0;
      return {
        ...SOURCE,
        source_line: k + 2,
        unit: g.guide_id,
        wafer: g.wafer,
        die_id: g.die_id,
        guide_id: g.guide_id,
        window_start_mm: at,
        window_length_mm: length / 1e3,
        domains: Math.floor(length / (g.period_um * ratio(g)) + random.uniform()) - merged,
        merged,
        duty_mean: 0.5,
        duty_sd: 0.03,
      } as PolingRecord;
    })
  );
  return { ...lot, design, periods: pooledWindows(windows, design) };
}

Deno.test("windows pooled over a wafer tell which drawn period is 1.5 % off, with numbers and lines", () => {
  const facts = poled(1, (g) => g.wafer === "L001-2" && Math.abs(g.period_um - 17.2) < 1e-9 ? 1.015 : 1);
  const [flag, ...none] = flagsOf(facts, rules, []);
  deepEqual(none, []);
  deepEqual([flag!.id, flag!.severity], ["L001-2", "act"]);
  match(
    flag!.statement,
    /period of 6 of 24 inspected guides .*they have 17\.\d+ µm \(u 0\.0\d+, from 12 windows on 6 guides\), drawn 17\.2 µm/,
  );
  deepEqual(flag!.evidence.readings.map((r) => [r.table, r.lines]), [["poling", [[2, 3]]]]);
});

Deno.test("a whole wafer that is off is told as one, and both wafers alike only as far as counting allows", () => {
  const one = flagsOf(poled(2, (g) => g.wafer === "L002-1" ? 0.96 : 1), rules, []);
  deepEqual(one.map((f) => f.id), ["L002-1"]);
  // Of two wafers that differ by 1 % either may be the one that is right.
  deepEqual(flagsOf(poled(2, (g) => g.wafer === "L002-1" ? 0.99 : 1), rules, []), []);
  // 1 % on every guide of the lot might be the way of counting: 0.6 of a domain in each window.
  deepEqual(flagsOf(poled(3, () => 0.99), rules, []), []);
  equal(flagsOf(poled(4, () => 0.95), rules, []).length, 2);
});

Deno.test("lots made as drawn raise nothing, and windows that name no guide count where only one period was drawn", () => {
  for (let k = 10; k < 210; k++) deepEqual(flagsOf(poled(k, () => 1), rules, []), [], `lot ${k}`);
  const lot = simulatedLot(5);
  const window = (die_id: string | null) =>
    ({
      ...SOURCE,
      unit: die_id ?? "L005-1",
      wafer: "L005-1",
      die_id,
      guide_id: null,
      window_length_mm: 1.7,
      domains: 100,
      merged: 0,
    }) as unknown as PolingRecord;
  const [found] = pooledWindows([window("L005-1/01"), window(null)], lot.design);
  deepEqual([found!.units, found!.count, found!.drawn_um], [["L005-1/01", "L005-1"], 2, 17]);
  ok(Math.abs(found!.ratio - 1) < 1e-9);
});
