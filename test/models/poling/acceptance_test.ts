import { ok, strictEqual, throws } from "node:assert/strict";
import {
  acceptance,
  bandCovering,
  effectiveLength,
  gratingSpectrum,
  SINC_SQUARED_WIDTH,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { assertClose } from "../../assert_close.ts";

const period = 18.9747e-6;
const vector = 2 * Math.PI / period;
const length = 527 * period; // 10.0 mm in whole periods
const grating = uniformGrating({ start: 0, length, period });
const s = gratingSpectrum(grating, bandCovering(vector - 12_000, vector + 12_000, length));

Deno.test("acceptance() of a uniform grating in Δβ is 5.566/L, and gives its length back", () => {
  const found = acceptance(s, (x) => vector + x, [-2000, 2000]);
  assertClose(found.width!, SINC_SQUARED_WIDTH / length, { rel: 1e-5 });
  assertClose(effectiveLength(found.width!), length, { rel: 1e-5 });
  assertClose(found.power, (2 / Math.PI) ** 2, { rel: 1e-3 });
  assertClose(found.peak, 0, { abs: 0.5 });
});

Deno.test("acceptance() of congruent lithium niobate, 1550 → 775 nm, 10 mm, is 1.1664 nm", () => {
  // Group indices of D. H. Jundt's n_e at 25 °C, recomputed: 2.27366 at 775 nm, 2.18243 at 1550 nm; the published
  // closed form λ²·0.44295/[L(n_g(λ/2) − n_g(λ))] gives 1.16647 nm (Fejer et al., IEEE J. Quantum Electron. 28, 2631
  // (1992), formula from memory).
  const slope = -4 * Math.PI * (2.27366 - 2.18243) / 1550e-9 ** 2;
  const found = acceptance(s, (x) => vector + slope * x, [-3e-9, 3e-9]);
  assertClose(found.width!, 1.16647e-9, { rel: 5e-4 });
  assertClose(found.high! - found.low!, found.width!, { rel: 1e-12 });
});

Deno.test("acceptance() is the same for a falling, a scaled and a negative Δβ", () => {
  const rising = acceptance(s, (x) => vector + x, [-2000, 2000]).width!;
  assertClose(acceptance(s, (x) => vector - x, [-2000, 2000]).width!, rising, { rel: 1e-9 });
  assertClose(acceptance(s, (x) => vector + x * 1e12, [-2e-9, 1e-9]).width!, rising * 1e-12, { rel: 1e-9 });
  const mirrored = gratingSpectrum(grating, bandCovering(-vector - 9000, -vector + 9000, length));
  assertClose(acceptance(mirrored, (x) => -vector + x, [-2000, 2000]).width!, rising, { rel: 1e-6 });
});

Deno.test("acceptance() is null where the power does not fall to half inside the window", () => {
  const oneSide = acceptance(s, (x) => vector + x, [-100, 2000]);
  strictEqual(oneSide.width, null);
  strictEqual(oneSide.low, null);
  ok(oneSide.high! > 200);
  strictEqual(acceptance(s, (x) => vector + x, [-2000, 100]).high, null);
  // At a turning point of Δβ(x) on the peak the power never falls.
  strictEqual(acceptance(s, (x) => vector + x * x, [-5, 5]).width, null);
});

Deno.test("acceptance() of a peak at a turning point has crossings on both sides", () => {
  const found = acceptance(s, (x) => vector + x * x, [-60, 60]);
  const half = acceptance(s, (x) => vector + x, [-2000, 2000]).high!;
  assertClose(found.width!, 2 * Math.sqrt(half), { rel: 1e-3 });
});

Deno.test("acceptance() refuses an empty window and a Δβ beyond the spectrum", () => {
  throws(() => acceptance(s, (x) => vector + x, [1, 1]), RangeError);
  throws(() => acceptance(s, (x) => vector + x, [-1e6, 1e6]), RangeError);
});
