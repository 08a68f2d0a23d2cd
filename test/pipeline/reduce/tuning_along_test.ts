import assert from "node:assert/strict";
import { mismatchProfile, parameterSlope } from "../../../models/decision/mod.ts";
import { mismatch } from "../../../models/guides/mod.ts";
import { gratingSpectrumDirect, uniformGrating } from "../../../models/poling/mod.ts";
import type { LotReadings } from "../../../pipeline/reduce/lot_readings.ts";
import { reduceTuning } from "../../../pipeline/reduce/tuning.ts";
import type { AlongByGuide } from "../../../pipeline/traits/along_guide.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import { assertClose } from "../../assert_close.ts";
import { doubling, solvedPlatform } from "../../models/decision/solved_guide.ts";

const waves = doubling(1550, "TM");
const { model } = solvedPlatform("ti-ln-zcut", 7, [waves]);
const geometry = { width_um: 7 };
const guide = {
  wafer: "A",
  die_id: "A/01",
  guide_id: "A/01/g1",
  width_um: 7,
  period_um: 17.08,
  poled_from_mm: 1,
  poled_length_mm: 16,
  length_mm: 18,
};
/** Wider over the last third of the guide: its curve is not symmetric, and its mean over the poled length is not 0. */
const along: AlongByGuide = new Map([[guide.guide_id, [{
  parameter: "width_um",
  along: { parameter: "width_um", z: [0.002, 0.011, 0.016], deviation: [-0.04, -0.03, 0.07] },
  sd: 0.06,
  u: 0.005,
  places: 3,
  refs: [{ table: "geometry", file_name: "readings/geometry.csv", source_file: "1", lines: [[2, 4]] }],
}]]]);

/** A scan of a guide that varies so, with an offset of its own (1/m). */
function scan(offset: number) {
  const grating = uniformGrating({ start: 0.001, length: 0.016, period: guide.period_um * 1e-6 });
  return Array.from({ length: 81 }, (_, k) => {
    const T = 35 + k * 0.5;
    const slope = (p: "width_um") => parameterSlope(model, { waves, geometry, temperatureC: T }, p);
    const profile = mismatchProfile(
      along.get(guide.guide_id)!.map((a) => a.along!),
      (p) => slope(p as "width_um"),
    )!;
    const first = mismatch(model.index, waves, T, geometry) + offset;
    const { re, im } = gratingSpectrumDirect(grating, { first, step: 1, count: 1 }, {
      profile,
      scale: model.expansion(T),
    });
    return {
      scope: "guide",
      unit: guide.guide_id,
      ...guide,
      scan: "a",
      process: "second-harmonic",
      polarisations: "TM+TM>TM",
      temperature_c: T,
      wavelength_nm: 1550,
      power_rel: re[0]! ** 2 + im[0]! ** 2,
      file_name: "readings/tuning.csv",
      source_file: "00",
      source_line: k + 2,
    };
  });
}

function offsetOf(known: AlongByGuide) {
  const readings = {
    tuning: scan(40),
    poling: [],
    design: { guideById: new Map([[guide.guide_id, guide]]), lot: { lot: "A" } },
    platform: { defaults: {}, priors: {}, platform: "p" },
    model,
  } as unknown as LotReadings;
  const { traits, remarks } = reduceTuning(
    readings,
    new Map(),
    new TraitPools(readings.platform, readings.design, []),
    known,
  );
  assert.deepEqual(remarks, []);
  return traits.find((t) => t.trait === "mismatch_offset_per_m")!;
}

Deno.test("the offset that a scan leaves is beside what the guide's own variation does, and names those readings", () => {
  const known = offsetOf(along);
  const unknown = offsetOf(new Map());
  // Line width 2π/16 mm = 393 1/m: the fit of a symmetric curve holds the centre of this one to some per cent of it.
  assertClose(known.value, 40, { abs: 12 });
  assert.ok(
    Math.abs(unknown.value - 40) > 2 * Math.abs(known.value - 40),
    `${known.value}, without: ${unknown.value}`,
  );
  assert.ok(known.readings.some((r) => r.table === "geometry"));
  assert.ok(!unknown.readings.some((r) => r.table === "geometry"));
});
