import assert from "node:assert/strict";
import { drawTraits } from "../../../models/decision/drawn_traits.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, trait } from "./a_guide.ts";
import { doubling } from "./solved_guide.ts";

Deno.test("drawTraits() scales one mode reading to the wavelength of each arm, and lets both arms err together", () => {
  const mode = (factor: number) => ({ x: trait(8 * factor, 0.4 * factor, "mode"), y: trait(6, 0, "y") });
  const drawn = drawTraits({
    ...guide,
    signal: { ...guide.signal, mode: mode(1) },
    idler: { ...guide.idler, mode: mode(1.1) },
  });
  const [signal, idler] = [drawn.signal.modeX!, drawn.idler.modeX!];
  assert.ok(new Set(signal).size > 200);
  signal.forEach((x, k) => assertClose(idler[k]!, 1.1 * x, { rel: 1e-12 }));
});

Deno.test("drawTraits() has a column of a pooled spread, and none of a scanned one, whose realisations take other draws", () => {
  const sd = trait(100, 20, "sd");
  const scanned = {
    waves: doubling(1582, "TM"),
    effectiveLength: trait(15, 1, "length"),
    peakKept: trait(0.8, 0.1, "kept"),
  };
  const drawn = (told: typeof scanned | null) =>
    drawTraits({ ...guide, mismatchSpread: { sd, correlationLength: 1e-3, scanned: told } });
  const names = (d: ReturnType<typeof drawn>) =>
    d.columns.filter((c) => c.roles.includes("poling")).map((c) => c.trait);
  const [pooled, own] = [drawn(null), drawn(scanned)];
  assert.deepEqual(names(pooled), ["duty", "duty_sd", "merged", "mismatch_sd_per_m"]);
  assert.deepEqual(names(own), ["duty", "duty_sd", "merged", "effective_length_mm", "peak_kept"]);
  assert.deepEqual(own.mismatchSd, pooled.mismatchSd);
});
