import assert from "node:assert/strict";
import { predictGuide } from "../../../models/decision/mod.ts";
import type { Figure } from "../../../shared/schemas/figures.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

const doubling = (oven: readonly [number, number]) =>
  request({
    process: "second-harmonic",
    polarisations: TYPE_II,
    signal: { wavelength_nm: 1582, average_power_mw: 10 },
    oven_c: oven,
  });

const pairs = (change: Record<string, unknown> = {}) =>
  request({
    process: "pair-generation",
    polarisations: TYPE_II,
    pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
    signal: { wavelength_nm: 1582, fibre_mfd_um: 10.4, detector: { efficiency: 0.85 } },
    idler: { fibre_mfd_um: 10.4, detector: { efficiency: 0.85 } },
    ...change,
  });

function predict(of: typeof guide, checked: ReturnType<typeof request>) {
  const prediction = predictGuide(ktp, checked, of, { recorded: null });
  const figure = (name: Figure) => prediction.figures.find((f) => f.figure === name)!;
  return { prediction, figure };
}

Deno.test("draws that match count at full efficiency also where the nominal offset lies beyond the oven", () => {
  const certain = predict(guide, doubling([20, 90]));
  const root = certain.figure("operating_temperature_c").mean!;
  // Nominally out of reach by 150 1/m: at the edge of the oven this guide would be 1.4 rad out of phase at its ends.
  const edge = predict({ ...guide, offset: trait(150, 0, "scan") }, doubling([20, 90]));
  const shift = edge.figure("operating_temperature_c").mean! - root;
  const oven: [number, number] = shift > 0 ? [20, root] : [root, 90];
  const uncertain = predict({ ...guide, offset: trait(150, 200, "scan") }, doubling(oven));
  assert.ok(uncertain.prediction.matched > 0.05 && uncertain.prediction.matched < 0.5);
  assertClose(
    uncertain.figure("efficiency_percent_per_w").mean!,
    certain.figure("efficiency_percent_per_w").mean!,
    { rel: 0.02 },
  );
});

Deno.test("an oven of one temperature at the end of the index answers at that temperature", () => {
  for (const T of [5, 250]) {
    assert.equal(predict(guide, doubling([T, T])).figure("operating_temperature_c").mean, T);
  }
});

Deno.test("a filter that reaches beyond the index leaves the pair figures null with the reason", () => {
  const filter = { shape: "gaussian", fwhm_nm: 700, peak: 1 };
  const { figure } = predict(guide, pairs({ signal: { wavelength_nm: 1582, filter } }));
  for (const name of ["purity", "heralding_signal", "pairs_per_pulse"] as const) {
    assert.equal(figure(name).mean, null);
    assert.match(figure(name).reason!, /filter: found its band/);
  }
  assert.ok(figure("efficiency_percent_per_w").mean! > 0);
});
