import assert from "node:assert/strict";
import { mismatch } from "../../../models/guides/mod.ts";
import { reduceTuning, type WallPeaks } from "../../../pipeline/reduce/tuning.ts";
import type { LotReadings } from "../../../pipeline/reduce/lot_readings.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import { assertClose } from "../../assert_close.ts";
import { ktp } from "../../models/decision/a_guide.ts";

const guide = {
  wafer: "A",
  die_id: "A/01",
  guide_id: "A/01/g1",
  width_um: 3,
  period_um: 46.1,
  poled_from_mm: 1,
  poled_length_mm: 18,
  length_mm: 20,
};
const K = 2 * Math.PI / 46.1e-6;

/** A scan over temperature of a guide whose true Δβ is the calculated one plus `offset`, its grating's peak at `peak`. */
function scan(offset: number, peak: number) {
  const at = (T: number) => {
    const waves = { lambdaP: 791e-9, lambdaS: 1582e-9, lambdaI: 1582e-9 } as const;
    const pols = { polP: "TE", polS: "TE", polI: "TM" } as const;
    const real = mismatch(ktp.index, { ...waves, ...pols }, T, { width_um: 3 }) + offset;
    const x = (Math.abs(real) - peak / ktp.expansion(T)) * 0.018 / 2;
    return x === 0 ? 1 : (Math.sin(x) / x) ** 2;
  };
  return Array.from({ length: 141 }, (_, k) => ({
    scope: "guide",
    unit: guide.guide_id,
    ...guide,
    scan: "a",
    process: "second-harmonic",
    polarisations: "TE+TM>TE",
    temperature_c: 20 + k * 0.5,
    wavelength_nm: 1582,
    power_rel: at(20 + k * 0.5),
    file_name: "readings/tuning.csv",
    source_file: "00",
    source_line: k + 2,
  }));
}

function offsetOf(tuning: ReturnType<typeof scan>, peaks: WallPeaks): number {
  const design = { guideById: new Map([[guide.guide_id, guide]]), lot: { lot: "A" } };
  const platform = { defaults: {}, priors: {}, platform: "p" };
  const readings = { tuning, poling: [], design, platform, model: ktp } as unknown as LotReadings;
  const pools = new TraitPools(readings.platform, readings.design, []);
  const { traits, remarks } = reduceTuning(readings, peaks, pools);
  assert.deepEqual(remarks, []);
  const found = traits.find((t) => t.trait === "mismatch_offset_per_m")!;
  assert.equal(found.process, "TE>TE+TM");
  return found.value;
}

Deno.test("reduceTuning() finds the offset of a process whose mismatch is negative, with the sign of Δβ", () => {
  assertClose(offsetOf(scan(25, K), new Map()), 25, { abs: 0.5 });
  assertClose(offsetOf(scan(-25, K), new Map()), -25, { abs: 0.5 });
});

Deno.test("reduceTuning() holds a scan against the peak of inspected walls, whatever the sign of Δβ", () => {
  assertClose(offsetOf(scan(25, K + 40), new Map([[guide.guide_id, { deltaBeta: K + 40, refs: [] }]])), 25, {
    abs: 0.5,
  });
});
