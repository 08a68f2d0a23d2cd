import { deepEqual, equal, match, ok } from "node:assert/strict";
import { contradictionsOf, contradictionText } from "../../../pipeline/predict/contradictions.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import { checkRequest, requestSchema } from "../../../shared/schemas/request.ts";
import { guideRecord, lotDesign, PLATFORM, traitRow } from "../traits/a_lot.ts";

/** Ten dies with one guide read each at 0.3 dB/cm or so; that of die 06 at 0.8. */
const ROWS = Array.from({ length: 10 }, (_, k) => {
  const unit = `A-1/${String(k + 1).padStart(2, "0")}/g1`;
  return traitRow("loss_db_cm", unit, k === 5 ? 0.8 : 0.3 + 0.003 * ((3 * k) % 5), {
    wavelength_nm: 1550,
    polarisation: "TE",
    u: 0.01,
    readings: [{
      table: "fringes",
      file_name: "readings/fringes.csv",
      source_file: "00",
      lines: [[k + 2, k + 2]],
    }],
  });
});

function asked(request: object) {
  const checked = checkRequest(requestSchema.parse(request));
  ok(!("problems" in checked));
  return checked;
}

Deno.test("a contradicting reading is named once for signal and idler of one wave, with its line and what was expected", () => {
  const request = asked({
    request: "double",
    process: "second-harmonic",
    polarisations: { pump: "TE", signal: "TE", idler: "TE" },
    signal: { wavelength_nm: 1550 },
    oven_c: [20, 90],
  });
  const guides = ROWS.map((r) => guideRecord(r.unit));
  const pools = new TraitPools(PLATFORM, lotDesign({}, guides), ROWS);
  const found = contradictionsOf(pools, request);
  deepEqual(found.map((c) => [c.unit, c.trait, c.used]), [["A-1/06/g1", "loss_db_cm", [5]]]);
  match(
    contradictionText(found[0]!, pools),
    /^A-1\/06\/g1: loss_db_cm at 1550 nm TE of 0\.8 \(readings\/fringes\.csv:7\) contradicts the other readings, which lead to 0\.3\d* ± 0\.0\d+; it is kept$/,
  );
  const good = ROWS.filter((_, k) => k !== 5);
  equal(contradictionsOf(new TraitPools(PLATFORM, lotDesign({}, guides), good), request).length, 0);
});
