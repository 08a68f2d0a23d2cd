import { ok, throws } from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  bareReflectivity,
  type FringeLoss,
  fringeLoss,
  isRefused,
  meanReflectivity,
  reducedReflectivity,
} from "../../../models/metrology/mod.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import { randomFrom } from "../../../shared/random.ts";
import { dbPerCm, toDbPerCm } from "../../../shared/units.ts";

const loss = JSON.parse(
  Deno.readTextFileSync(new URL("../../../fixtures/check-values/loss.json", import.meta.url)),
);
const exact = (value: number) => ({ value, u: 0 });
function read(result: ReturnType<typeof fringeLoss>): FringeLoss {
  if (isRefused(result)) throw new Error(result.refused);
  return result;
}

Deno.test("fringeLoss() and bareReflectivity() meet the worked table", () => {
  // R. Regener & W. Sohler, Appl. Phys. B 36, 143 (1985): formula from memory, values recomputed in loss.json (E)
  for (const row of loss.fabry_perot_contrast.values) {
    const R = bareReflectivity(exact(row.n)).value;
    assertClose(R, row.R, { abs: 6e-9 });
    // the table's K is rounded to 5e-9, which is about 1e-7 of the loss: rebuild it from the loss, then go back
    const reduced = R * Math.exp(-dbPerCm(row.alpha_dB_cm) * row.L_cm / 100);
    const K = 2 * reduced / (1 + reduced ** 2);
    assertClose(K, row.K, { abs: 6e-9 });
    const alpha = toDbPerCm(read(fringeLoss(exact(K), exact(R), exact(row.L_cm / 100))).alpha.value);
    assertClose(alpha, row.alpha_dB_cm, { rel: 1e-12 });
    const printed = read(fringeLoss(exact(row.K), exact(row.R), exact(row.L_cm / 100)));
    assertClose(toDbPerCm(printed.alpha.value), row.alpha_dB_cm, { abs: 5e-7 / row.L_cm });
  }
  for (const row of loss.fresnel) {
    const R = bareReflectivity(exact(row.n)).value;
    assertClose(R, row.R, { abs: 6e-9 });
    assertClose(-10 * Math.log10(1 - R), row.loss_dB, { abs: 1e-7 });
  }
});

Deno.test("any loss comes back from its own contrast, faint fringes included", () => {
  fc.assert(
    fc.property(
      fc.double({ min: 1e-4, max: 0.9, noNaN: true }),
      fc.double({ min: 0, max: 3000, noNaN: true }),
      fc.double({ min: 1e-3, max: 0.1, noNaN: true }),
      (R, alpha, L) => {
        fc.pre(alpha * L < 30);
        const reduced = R * Math.exp(-alpha * L);
        const result = fringeLoss(exact(2 * reduced / (1 + reduced ** 2)), exact(R), exact(L));
        // near R = 1 the contrast is flat in the reflectivity: dlnR̃ = dK/(K√(1−K²))
        const flat = (1 + reduced ** 2) / (1 - reduced ** 2);
        assertClose(read(result).alpha.value, alpha, { abs: 1e-15 * flat / L * 4, rel: 1e-12 });
      },
    ),
    { seed: 21 },
  );
  assertClose(reducedReflectivity(1e-12), 5e-13, { rel: 1e-15 });
});

Deno.test("contrast above the lossless bound, and no contrast, are refused with the reason", () => {
  const R = 0.14;
  const bound = 2 * R / (1 + R * R);
  const above = fringeLoss(exact(bound + 1e-6), exact(R), exact(0.02));
  ok(isRefused(above) && above.refused.includes("lossless"));
  assertClose(read(fringeLoss(exact(bound), exact(R), exact(0.02))).alpha.value, 0, { abs: 1e-12 });
  const none = fringeLoss(exact(0), exact(R), exact(0.02));
  ok(isRefused(none) && none.refused.includes("no fringes"));
  ok(isRefused(fringeLoss(exact(1), exact(R), exact(0.02))));
  throws(() => fringeLoss(exact(NaN), exact(R), exact(0.02)), RangeError);
  throws(() => fringeLoss(exact(0.2), exact(1), exact(0.02)), RangeError);
  throws(() => fringeLoss(exact(0.2), exact(R), exact(0)), RangeError);
  throws(() => fringeLoss({ value: 0.2, u: -1 }, exact(R), exact(0.02)), RangeError);
});

Deno.test("u(α) to first order agrees with sampling, both facets erring together", () => {
  const random = randomFrom("fringes");
  const n = { value: 2.2, u: 0.004 };
  const contrast = { value: 0.2, u: 0.003 };
  const length = { value: 0.03, u: 0.0001 };
  const facet = bareReflectivity(n);
  const R = meanReflectivity(facet, facet, 1);
  assertClose(R.u, facet.u, { rel: 1e-12 });
  const linear = read(fringeLoss(contrast, R, length)).alpha;
  const draws: number[] = [];
  for (let k = 0; k < 20_000; k++) {
    const drawn = bareReflectivity(exact(n.value + n.u * random.normal())).value; // both facets: one index
    const K = contrast.value + contrast.u * random.normal();
    const L = length.value + length.u * random.normal();
    draws.push(Math.log(drawn / reducedReflectivity(K)) / L);
  }
  assertClose(standardDeviation(draws), linear.u, { rel: 0.025 }); // 20,000 draws: 0.5 %; second order: 1 %
  assertClose(mean(draws), linear.value, { abs: 0.05 * linear.u });
});

Deno.test("meanReflectivity() adds correlated facets in full and independent ones in square", () => {
  const a = { value: 0.2, u: 0.01 };
  const b = { value: 0.05, u: 0.002 };
  assertClose(meanReflectivity(a, b, 0).value, 0.1, { rel: 1e-12 });
  assertClose(meanReflectivity(a, b, 1).u, 0.1 * (0.05 + 0.04) / 2, { rel: 1e-12 });
  assertClose(meanReflectivity(a, b, 0).u, 0.1 * Math.hypot(0.05, 0.04) / 2, { rel: 1e-12 });
  throws(() => meanReflectivity(a, { value: 0, u: 0 }, 1), RangeError);
  throws(() => meanReflectivity(a, b, 2), RangeError);
});

Deno.test("bareReflectivity() has the derivative it propagates, and none at the index outside", () => {
  const step = 1e-6;
  const slope =
    (bareReflectivity(exact(2.2 + step), 1.45).value - bareReflectivity(exact(2.2 - step), 1.45).value) /
    (2 * step);
  assertClose(bareReflectivity({ value: 2.2, u: 1 }, 1.45).u, slope, { rel: 1e-8 });
  assertClose(bareReflectivity({ value: 1.45, u: 0.1 }, 1.45).value, 0, { abs: 0 });
  throws(() => bareReflectivity(exact(0.9)), RangeError);
});
