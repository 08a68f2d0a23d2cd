import assert from "node:assert/strict";
import { reducePoling } from "../../../pipeline/reduce/poling.ts";
import type { LotReadings } from "../../../pipeline/reduce/lot_readings.ts";
import type { PolingRecord } from "../../../pipeline/records.ts";
import { assertClose } from "../../assert_close.ts";

const window = (start: number, domains: number, merged: number): PolingRecord => ({
  scope: "guide",
  unit: "A/01/g1",
  wafer: "A",
  die_id: "A/01",
  guide_id: "A/01/g1",
  file_name: "readings/poling.csv",
  source_file: "00",
  source_line: 2 + start,
  window_start_mm: start,
  window_length_mm: 1,
  domains,
  duty_mean: domains === 0 ? 0 : 0.48,
  duty_sd: domains === 0 ? 0 : 0.03,
  merged,
});

const reduced = (poling: PolingRecord[]) =>
  reducePoling({ poling, design: { guideById: new Map() } } as unknown as LotReadings);
const valueOf = (poling: PolingRecord[], trait: string) =>
  reduced(poling).traits.find((t) => t.trait === trait)?.value;

Deno.test("reducePoling() counts missing domains of windows in which none was found", () => {
  const half = [window(0, 40, 0), window(1, 0, 40)];
  assertClose(valueOf(half, "duty")!, 0.48, { rel: 1e-12 });
  assertClose(valueOf(half, "merged")!, 0.5, { rel: 1e-12 });
});

Deno.test("reducePoling() of a guide without any domain says that all are missing and nothing of a duty", () => {
  const dead = reduced([window(0, 0, 40)]);
  assert.deepEqual(dead.traits.map((t) => [t.trait, t.value]), [["merged", 1]]);
  assert.ok(Number.isFinite(dead.traits[0]!.u));
  assert.deepEqual(dead.remarks, []);
});

Deno.test("reducePoling() remarks windows in which nothing was counted at all", () => {
  const empty = reduced([window(0, 0, 0)]);
  assert.deepEqual(empty.traits, []);
  assert.equal(empty.remarks[0]!.code, "poling_empty");
});
