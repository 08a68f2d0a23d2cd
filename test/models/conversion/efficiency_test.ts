import { throws } from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  depletedSecondHarmonic,
  deviceEfficiency,
  lossyUniform,
  mixingWeight,
  pairWeight,
  secondHarmonicWeight,
  undepletedDifferenceFrequency,
  undepletedSumFrequency,
} from "../../../models/conversion/mod.ts";
import { dbPerCm } from "../../../shared/units.ts";

/** |(1/L)∫ e^{iδz} g(z) dz|² by the midpoint rule: slow and obvious. */
function slowKernel(g: (z: number) => number, detuning: number, length: number): number {
  const steps = 20_000;
  let re = 0;
  let im = 0;
  for (let k = 0; k < steps; k++) {
    const z = (k + 0.5) / steps * length;
    re += Math.cos(detuning * z) * g(z);
    im += Math.sin(detuning * z) * g(z);
  }
  return (re ** 2 + im ** 2) / steps ** 2;
}

Deno.test("loss weights are those of the fields that make and carry the output", () => {
  const [s, i, p, length] = [3, 5, 11, 0.04];
  const at = (w: { decay: number; amplitude: number }, z: number) => w.amplitude * Math.exp(-w.decay * z);
  for (const z of [0, 0.013, length]) {
    assertClose(
      at(secondHarmonicWeight({ s, i, p }, length), z),
      Math.exp(-(s + i) / 2 * z - p * (length - z) / 2),
      { rel: 1e-13 },
    );
    assertClose(
      at(mixingWeight({ a: p, b: s, out: i }, length), z),
      Math.exp(-(p + s) * z / 2 - i * (length - z) / 2),
      { rel: 1e-13 },
    );
    assertClose(at(pairWeight(p), z), Math.exp(-p * z / 2), { rel: 1e-13 });
  }
});

Deno.test("a lossy harmonic loses the tabulated share of its efficiency", () => {
  // {[e^{−α₂L/2} − e^{−α₁L}]/[(α₁−α₂/2)L]}²; the cases are recomputed values of fixtures/check-values/poling.json (C3).
  const cases = [
    [0.1, 0.1, 5, 0.84162751],
    [0.1, 0.4, 5, 0.7087281],
    [0.3, 1.0, 1, 0.83191078],
    [0.1, 0.2, 5, 0.79432823], // the limit α₂ = 2α₁
  ] as const;
  for (const [a1, a2, cm, factor] of cases) {
    const length = cm / 100;
    const w = secondHarmonicWeight({ s: dbPerCm(a1), i: dbPerCm(a1), p: dbPerCm(a2) }, length);
    assertClose(w.amplitude ** 2 * lossyUniform(0, w.decay, length), factor, { rel: 1e-7 });
  }
});

Deno.test("lossyUniform() agrees with the integral at any loss and mismatch", () => {
  const number = (max: number) => fc.double({ min: -max, max, noNaN: true });
  fc.assert(
    fc.property(
      number(200),
      number(2000),
      fc.double({ min: 1e-3, max: 0.05, noNaN: true }),
      (g, d, length) => {
        const slow = slowKernel((z) => Math.exp(-g * z), d, length);
        assertClose(lossyUniform(d, g, length), slow, { rel: 1e-5, abs: 1e-9 });
      },
    ),
    { numRuns: 40, seed: 5 },
  );
});

Deno.test("lossyUniform() is smooth at the origin and finite for a very lossy guide", () => {
  assertClose(lossyUniform(0, 0, 0.01), 1, { rel: 1e-15 });
  assertClose(lossyUniform(1e-130, 1e-130, 1), 1, { rel: 1e-12 });
  assertClose(lossyUniform(0, 1e-7, 1), 1 - 1e-7, { rel: 1e-12 });
  assertClose(lossyUniform(0, 5000, 1), 1 / 5000 ** 2, { rel: 1e-12 });
  // half maximum of sinc²: full width ΔβL = 5.566229513 (recomputed, check-values C1)
  assertClose(lossyUniform(5.566229513 / 2, 0, 1), 0.5, { rel: 1e-9 });
});

Deno.test("depletedSecondHarmonic() meets the tabulated tanh² values", () => {
  // J. A. Armstrong et al., Phys. Rev. 127, 1918 (1962) (from memory; recomputed, check-values C3)
  const table = [[0.01, 0.00993371], [0.1, 0.09369236], [0.5, 0.37070973], [1, 0.58002566], [2, 0.78922891]];
  for (const [x, y] of table) assertClose(depletedSecondHarmonic(x!), y!, { abs: 5e-9 });
});

Deno.test("undepleted mixing tends to the low-depletion answer and keeps its limits", () => {
  const small = 1e-7;
  assertClose(undepletedSumFrequency(small, 1, 0.5), small * 0.5, { rel: 1e-6 });
  assertClose(undepletedDifferenceFrequency(small, 1, 0.5), small * 0.5, { rel: 1e-6 });
  assertClose(undepletedSumFrequency((Math.PI / 2) ** 2, 2, 0.5), 1, { rel: 1e-14 });
  // with a mismatch and little power both are Γ²L²·sinc²(δL/2)
  const sinc2 = (Math.sin(1.3) / 1.3) ** 2;
  assertClose(undepletedSumFrequency(small, 1, 1, 1.3), small * sinc2, { rel: 1e-6 });
  assertClose(undepletedDifferenceFrequency(small, 1, 1, 1.3), small * sinc2, { rel: 1e-6 });
  // at the parametric threshold Γ = δ/2 sinh and sin meet in Γ²L²
  assertClose(undepletedDifferenceFrequency(1.69, 1, 1, 1.3), 1.69, { rel: 1e-9 });
  assertClose(undepletedSumFrequency(0, 1, 1), 0, { abs: 0 });
});

Deno.test("deviceEfficiency() scales with the poled length squared and refuses nonsense", () => {
  const one = deviceEfficiency(16_000, 0.01, 0.4);
  assertClose(one.perW, 16_000 * 1e-4 * 0.4, { rel: 1e-15 });
  assertClose(one.perWm2 * 0.01 ** 2, one.perW, { rel: 1e-15 });
  throws(() => deviceEfficiency(16_000, 0.01, NaN), RangeError);
  throws(() => deviceEfficiency(-1, 0.01, 0.4), RangeError);
  throws(() => secondHarmonicWeight({ s: 1, i: 1, p: NaN }, 0.01), RangeError);
  throws(() => mixingWeight({ a: 1, b: 1, out: 1 }, 0), RangeError);
  throws(() => pairWeight(Infinity), RangeError);
});
