import assert from "node:assert/strict";
import fc from "fast-check";
import { DEFAULT_SAMPLE, drawTrait, nestedStrata, type SampleSize } from "../../../models/decision/draws.ts";
import type { TraitColumn } from "../../../models/decision/drawn_traits.ts";
import type { Role } from "../../../models/decision/figure_basis.ts";
import { linearPropagation } from "../../../models/decision/linear_propagation.ts";
import { predictGuide } from "../../../models/decision/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { standardDeviation } from "../../../shared/statistics.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

const column = (key: string, role: Role, value: number, u: number, size = DEFAULT_SAMPLE): TraitColumn => ({
  key,
  trait: key,
  roles: [role],
  value,
  u,
  basis: "die",
  draws: drawTrait({ value, u }, {}, nestedStrata(size.draws, size.spectral, randomFrom(key))),
});
const figureOf = (columns: readonly TraitColumn[], f: (x: number[]) => number): Float64Array =>
  Float64Array.from(columns[0]!.draws, (_, k) => f(columns.map((c) => c.draws[k]!)));

Deno.test("linearPropagation() gives u = 2 for the sum of four normal traits of u = 1, as JCGM 101:2008, 9.2.2 does (from memory)", () => {
  const columns = (["pump_loss", "signal_loss", "idler_loss", "poling"] as const)
    .map((role) => column(`X ${role}`, role, 0, 1));
  const y = figureOf(columns, (x) => x.reduce((a, b) => a + b));
  const found = linearPropagation(columns, DEFAULT_SAMPLE)("survival_signal", y)!;
  assertClose(found.u, 2, { rel: 1e-9 });
  for (const slope of found.slopes) assertClose(slope!, 1, { rel: 1e-9 });
  // JCGM 101:2008, 9.2.3 (from memory): four rectangular inputs of that u give 2 as well; sampling agrees to its error.
  assertClose(standardDeviation(y), 2, { rel: 0.15 });
});

Deno.test("linearPropagation() finds the u of any linear figure, whatever else the guide draws", () => {
  const number = fc.double({ min: -3, max: 3, noNaN: true });
  fc.assert(fc.property(fc.array(number, { minLength: 3, maxLength: 3 }), fc.nat(1000), (slopes, seed) => {
    const columns = [
      column(`a${seed}`, "signal_loss", 1, 0.5),
      column(`b${seed}`, "idler_loss", 0, 2),
      column(`c${seed}`, "pump_loss", -1, 0.1),
      column(`d${seed}`, "signal_mode", 5, 1),
    ];
    const y = figureOf(columns, ([a, b, c]) => 7 + slopes[0]! * a! + slopes[1]! * b! + slopes[2]! * c!);
    const found = linearPropagation(columns, DEFAULT_SAMPLE)("survival_signal", y)!;
    const expected = Math.hypot(0.5 * slopes[0]!, 2 * slopes[1]!, 0.1 * slopes[2]!);
    assertClose(found.u, expected, { abs: 1e-6 * (1 + expected) });
    assert.equal(found.slopes[3], null);
  }));
});

Deno.test("linearPropagation() adds what a trait does to the spectrum that a draw takes to what it does by itself", () => {
  const columns = [column("duty", "poling", 0.5, 0.02), column("loss", "pump_loss", 0.6, 0.1)];
  const [duty, loss] = columns.map((c) => c.draws);
  const { spectral } = DEFAULT_SAMPLE;
  const y = duty!.map((d, k) => 3 * d - loss![k]! + 5 * duty![k % spectral]!);
  const found = linearPropagation(columns, DEFAULT_SAMPLE)("pairs_per_pulse", y)!;
  assertClose(found.slopes[0]!, 8, { rel: 1e-9 });
  assertClose(found.u, Math.hypot(8 * 0.02, 0.1), { rel: 1e-9 });
  // The sample itself mixes draws of the same trait: it can't see that they add up in one guide.
  assert.ok(standardDeviation(y) < 0.95 * found.u);
});

Deno.test("linearPropagation() says nothing where gratings of equal statistics hide the slopes, or draws are few", () => {
  const columns = [column("duty", "poling", 0.5, 0.02), column("duty_sd", "poling", 0.05, 0.02)];
  const noise = randomFrom("noise");
  const own = Array.from({ length: DEFAULT_SAMPLE.spectral }, () => noise.normal());
  const y = columns[0]!.draws.map((_, k) => own[k % own.length]!);
  assert.equal(linearPropagation(columns, DEFAULT_SAMPLE)("purity", y), null);
  const few = y.map((v, k) => k < 8 ? v : NaN);
  assert.equal(linearPropagation(columns, DEFAULT_SAMPLE)("purity", few), null);
  assert.equal(linearPropagation(columns, DEFAULT_SAMPLE)("purity", y.map(() => NaN)), null);
});

Deno.test("linearPropagation() tells slopes under such noise once every draw has a spectrum of its own", () => {
  const size: SampleSize = { draws: 512, spectral: 512 };
  const columns = [column("duty", "poling", 0.5, 0.02, size), column("duty_sd", "poling", 0.05, 0.02, size)];
  const noise = randomFrom("noise");
  const y = columns[0]!.draws.map((d) => 50 * d + noise.normal());
  const found = linearPropagation(columns, size)("purity", y)!;
  assertClose(found.u, 1, { abs: 0.15 });
});

Deno.test("linearPropagation() leaves draws without a value out, and has u 0 for what does not vary", () => {
  const columns = [column("a", "signal_loss", 0, 1), column("b", "idler_loss", 0, 0)];
  const half = columns[0]!.draws.map((x, k) => k % 3 === 0 ? NaN : 4 * x);
  const propagate = linearPropagation(columns, DEFAULT_SAMPLE);
  assertClose(propagate("survival_signal", half)!.u, 4, { rel: 1e-9 });
  assert.equal(propagate("detector_signal", new Float64Array(256).fill(0.8))!.u, 0);
  assert.equal(propagate("survival_signal", new Float64Array(256).fill(0.8))!.u, 0);
});

Deno.test("predictGuide() states a linear u beside the sampled one: equal for losses, near for the heralding budget", () => {
  const checked = request({
    process: "pair-generation",
    polarisations: TYPE_II,
    pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
    signal: { wavelength_nm: 1582, fibre_mfd_um: 10.4, detector: { efficiency: 0.85 } },
    idler: { wavelength_nm: 1582, fibre_mfd_um: 10.4, detector: { efficiency: 0.85 } },
  });
  const { figures } = predictGuide(ktp, checked, { ...guide, pumpLoss: trait(0.5, 0.05, "pump loss") }, {
    recorded: null,
  });
  const of = (name: string) => figures.find((f) => f.figure === name)!;
  assertClose(of("loss_db_cm_signal").uLinear!, 0.05, { rel: 1e-9 });
  for (const name of ["survival_signal", "coupling_idler", "heralding_signal", "heralding_idler"]) {
    assertClose(of(name).uLinear!, of(name).u!, { rel: 0.08 }, name);
  }
});
