import assert from "node:assert/strict";
import { knownReadingU } from "../../../pipeline/traits/known_readings.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";

Deno.test("knownReadingU() takes the median u of a lot's own readings, then what the platform states, then nothing", () => {
  const platform = platformSchema.parse(
    JSON.parse(Deno.readTextFileSync("models/platforms/bulk-ktp.json")),
  );
  const row = (trait: string, u: number, method: string) => ({ trait, u, method }) as unknown as TraitRow;
  const { byTrait, contrast } = knownReadingU("A", [
    row("loss_db_cm", 0.02, "fringe contrast, bare facets"),
    row("loss_db_cm", 0.04, "fringe contrast, bare facets"),
    row("loss_db_cm", 0.03, "fringe contrast, coated facets"),
    row("loss_db_cm", 9, "cut-back line"),
    row("duty", 0.001, "walls (200)"),
    row("mfd_x_um", 0.1, "mode-field diameter, 1/e² intensity"),
  ], platform);
  assert.deepEqual(byTrait.loss_db_cm, { u: 0.03, from: "median of 3 of lot A" });
  assert.deepEqual(byTrait.mfd_x_um, { u: 0.1, from: "the reading of lot A" });
  assert.deepEqual(byTrait.mfd_y_um, { u: 0.2, from: "the platform's u_mfd_um" });
  assert.equal(byTrait.duty, undefined, "walls are no windows");
  assert.equal(byTrait.mismatch_offset_per_m, undefined);
  assert.equal(contrast, 0.01);
});
