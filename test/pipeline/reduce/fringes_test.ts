import assert from "node:assert/strict";
import { reduceFringes } from "../../../pipeline/reduce/loss.ts";
import type { LotReadings } from "../../../pipeline/reduce/lot_readings.ts";
import type { FringesRecord } from "../../../pipeline/records.ts";
import { assertClose } from "../../assert_close.ts";

const place = { file_name: "readings/f.csv", source_file: "00", source_line: 2 };
const guide = { wafer: "A", die_id: "A/01", guide_id: "A/01/g1", width_um: 3, length_mm: 20 };

function read(change: Partial<FringesRecord>, outsideIndex: number, coating: number | null) {
  const fringes = [{
    ...place,
    scope: "guide",
    unit: guide.guide_id,
    wafer: "A",
    die_id: guide.die_id,
    guide_id: guide.guide_id,
    wavelength_nm: 1550,
    polarisation: "TE",
    contrast: 0.05,
    u_contrast: 0.001,
    facet_state: "bare",
    ...change,
  }];
  return reduceFringes({
    fringes,
    facets: coating === null ? [] : [{
      ...place,
      coating_run: "C1",
      facet: "out",
      wavelength_nm: 1550,
      reflectivity: coating,
      u_reflectivity: 0.001,
    }],
    platform: { defaults: {} },
    model: { outsideIndex, index: { nEff: () => 1.8 } },
    design: {
      guideById: new Map([[guide.guide_id, guide]]),
      coatingOf: new Map(coating === null ? [] : [["A/01|out", { coating_run: "C1" }]]),
    },
  } as unknown as LotReadings);
}

Deno.test("reduceFringes() takes the bare facet against the platform's outside_index", () => {
  // α = ln(R/R̃)/L (Regener & Sohler 1985), R of n 1.8 against 1.3.
  const R = ((1.8 - 1.3) / (1.8 + 1.3)) ** 2;
  const reduced = (1 - Math.sqrt(1 - 0.05 ** 2)) / 0.05;
  const dbPerCm = Math.log(R / reduced) / 2 * 10 / Math.LN10;
  assertClose(read({}, 1.3, null).traits[0]!.value, dbPerCm, { rel: 1e-9 });
});

Deno.test("reduceFringes() refuses fringes between facets of which one reflects nothing", () => {
  const { traits, remarks } = read({ facet_state: "coated" }, 1, 0);
  assert.deepEqual(traits, []);
  assert.match(remarks[0]!.statement, /a facet of reflectivity 0 makes no fringes/);
});
