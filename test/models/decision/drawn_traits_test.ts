import assert from "node:assert/strict";
import { drawTraits } from "../../../models/decision/drawn_traits.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, trait } from "./a_guide.ts";

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
