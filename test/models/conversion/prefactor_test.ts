import { deepStrictEqual, throws } from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import {
  differenceFrequencyPrefactor,
  photonCoupling,
  secondHarmonicPrefactor,
  type Strength,
  sumFrequencyPrefactor,
} from "../../../models/conversion/mod.ts";
import { omegaOf } from "../../../shared/units.ts";

const file = new URL("../../../fixtures/check-values/poling.json", import.meta.url);
const example = JSON.parse(Deno.readTextFileSync(file)).normalised_efficiency.example;

function strength(lambdaS: number, lambdaI: number, d = example.d_pm_V * 1e-12): Strength {
  const lambdaP = 1 / (1 / lambdaS + 1 / lambdaI);
  return {
    waves: { lambdaP, lambdaS, lambdaI, polP: "TM", polS: "TM", polI: "TM" },
    n: { p: example.n2, s: example.n1, i: example.n1 },
    d,
    effectiveArea: example.A_eff_um2 * 1e-12,
  };
}

Deno.test("secondHarmonicPrefactor() with d·2/π meets the textbook normalised efficiency", () => {
  // 8π²d_eff²/(ε₀cλ²n₁²n₂A_eff), recomputed in fixtures/check-values/poling.json; formula M. M. Fejer et al.,
  // IEEE J. Quantum Electron. 28, 2631 (1992) (from memory).
  const lambda = example.lambda_um * 1e-6;
  const effective = strength(lambda, lambda, example.d_pm_V * 1e-12 * 2 / Math.PI);
  assertClose(secondHarmonicPrefactor(effective), example.eta_per_W_m2, { abs: 0.005 }); // two printed decimals
});

Deno.test("sum frequency at equal inputs has four times the second-harmonic prefactor", () => {
  const same = strength(1.55e-6, 1.55e-6);
  assertClose(sumFrequencyPrefactor(same) / secondHarmonicPrefactor(same), 4, { rel: 1e-12 });
});

Deno.test("type II takes the product of both fundamental indices in place of n₁²", () => {
  const type0 = strength(1.55e-6, 1.55e-6);
  const type2 = { ...type0, n: { p: example.n2, s: example.n1, i: 2.21 } };
  assertClose(
    secondHarmonicPrefactor(type2) / secondHarmonicPrefactor(type0),
    example.n1 / 2.21,
    { rel: 1e-12 },
  );
});

Deno.test("sum and difference frequency convert the same number of photons per photon pair", () => {
  const s = strength(1.95e-6, 1.55e-6);
  const [wp, ws, wi] = [s.waves.lambdaP, s.waves.lambdaS, s.waves.lambdaI].map(omegaOf) as [
    number,
    number,
    number,
  ];
  const g2 = photonCoupling(s) ** 2;
  assertClose(sumFrequencyPrefactor(s) * ws * wi / wp, g2, { rel: 1e-12 });
  assertClose(differenceFrequencyPrefactor(s) * wp * ws / wi, g2, { rel: 1e-12 });
});

Deno.test("prefactors refuse inputs that have no meaning", () => {
  throws(() => secondHarmonicPrefactor(strength(1.55e-6, 1.56e-6)), /need one wavelength/);
  throws(() => sumFrequencyPrefactor({ ...strength(1.55e-6, 1.55e-6), effectiveArea: 0 }), RangeError);
  throws(() => sumFrequencyPrefactor({ ...strength(1.55e-6, 1.55e-6), d: NaN }), RangeError);
  const s = strength(1.55e-6, 1.95e-6);
  throws(() => sumFrequencyPrefactor({ ...s, waves: { ...s.waves, lambdaP: 0.9e-6 } }), /ω_s \+ ω_i/);
});

Deno.test("the sign of d does not matter for an efficiency", () => {
  const plus = secondHarmonicPrefactor(strength(1.55e-6, 1.55e-6, 4e-12));
  deepStrictEqual(secondHarmonicPrefactor(strength(1.55e-6, 1.55e-6, -4e-12)), plus);
});
