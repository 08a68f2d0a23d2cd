import assert from "node:assert/strict";
import { millerScaled, SELLMEIER_SETS, SHOJI_COEFFICIENTS } from "../../../models/materials/mod.ts";
import { nm } from "../../../shared/units.ts";
import { assertClose } from "../../assert_close.ts";

const qpm = JSON.parse(Deno.readTextFileSync("fixtures/check-values/qpm.json"));
const zzz = { p: "z", s: "z", i: "z" } as const;
const doubling = (fundamental: number) => ({
  lambdaP: nm(fundamental) / 2,
  lambdaS: nm(fundamental),
  lambdaI: nm(fundamental),
});

// Shoji et al. (1997), from memory except the KTP values at 1.064 µm.
Deno.test("every coefficient of Shoji et al. is there with its value, and no other", () => {
  const expected: string[] = [];
  for (const [key, material] of [["CLN", "CLN"], ["MgO5_CLN", "MgO:CLN"], ["KTP", "KTP"]] as const) {
    for (const [element, values] of Object.entries(qpm.nonlinear_coefficients_pm_per_V[key])) {
      for (const [um, d] of Object.entries(values as Record<string, number>)) {
        expected.push(`${material} ${element} ${Math.round(Number(um) * 1000)} ${d}`);
      }
    }
  }
  const ours = SHOJI_COEFFICIENTS.map((c) => `${c.material} ${c.element} ${c.at_nm} ${c.d_pm_per_v}`);
  assert.deepEqual(ours.sort(), expected.sort());
});

// Recomputed arithmetic of Miller's rule for one axis.
Deno.test("Miller's rule gives the recomputed factors", () => {
  const { miller_scaling } = qpm;
  assertClose(millerScaled("CLN", 1, nm(1064), zzz, doubling(1550)), miller_scaling.CLN_d33_1550_over_1064, {
    abs: 1e-5,
  });
  assertClose(millerScaled("CLN", 1, nm(1064), zzz, doubling(1313)), miller_scaling.CLN_d33_1313_over_1064, {
    abs: 1e-6,
  });
  // The KTP factor was recomputed with Kato & Takaoka's n_z at 20 °C; the material's own n_z is Fradkin's.
  const kato = (um: number) => SELLMEIER_SETS.kato_z.index(um, 20) ** 2 - 1;
  const cube = (um: number) => kato(um / 2) * kato(um) ** 2;
  assertClose(cube(1.313) / cube(1.064), miller_scaling.KTP_d33_1313_over_1064, { abs: 1e-6 });
  assertClose(millerScaled("KTP", 1, nm(1064), zzz, doubling(1313)), miller_scaling.KTP_d33_1313_over_1064, {
    rel: 1e-3,
  });
});

Deno.test("Miller's rule leaves a coefficient alone at its own wavelengths and undoes itself", () => {
  const axes = { p: "y", s: "y", i: "z" } as const;
  assertClose(millerScaled("KTP", 3.92, nm(1064), axes, doubling(1064)), 3.92, { rel: 1e-14 });
  const there = millerScaled("KTP", 3.92, nm(1064), axes, doubling(1582));
  assert.ok(there < 3.92 && there > 3);
  assertClose(millerScaled("KTP", there, nm(1582), axes, doubling(1064)), 3.92, { rel: 1e-14 });
});

Deno.test("Miller's rule follows each wave's own axis", () => {
  const waves = { lambdaP: nm(791), lambdaS: nm(1500), lambdaI: 1 / (1 / nm(791) - 1 / nm(1500)) };
  const swapped = { lambdaP: waves.lambdaP, lambdaS: waves.lambdaI, lambdaI: waves.lambdaS };
  const a = millerScaled("KTP", 1, nm(1064), { p: "y", s: "y", i: "z" }, waves);
  assertClose(millerScaled("KTP", 1, nm(1064), { p: "y", s: "z", i: "y" }, swapped), a, { rel: 1e-14 });
  assert.notEqual(millerScaled("KTP", 1, nm(1064), { p: "y", s: "z", i: "y" }, waves), a);
});

Deno.test("Miller's rule refuses waves without an index", () => {
  assert.throws(() => millerScaled("KTP", 1, nm(1064), zzz, doubling(880)), /RangeError.*440 nm/);
  assert.throws(() => millerScaled("KTP", 1, nm(880), zzz, doubling(1064)), /RangeError.*440 nm/);
});
