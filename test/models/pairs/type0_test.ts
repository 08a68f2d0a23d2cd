// Type 0 in congruent lithium niobate, TM > TM + TM: one polarisation, nearly one group delay.
import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import { refractiveIndex } from "../../../models/materials/mod.ts";
import {
  type Filter,
  type PairSource,
  pairSpectrum,
  prepareSource,
  pulse,
} from "../../../models/pairs/mod.ts";
import { gratingSpectrum, uniformGrating } from "../../../models/poling/mod.ts";
import { SPEED_OF_LIGHT } from "../../../shared/constants.ts";
import { lambdaOf, omegaOf } from "../../../shared/units.ts";

const lambdaP = 775e-9;

function cln(lambdaS: number, over: Partial<PairSource> = {}): PairSource {
  const k = (w: number) => refractiveIndex("CLN", "e", lambdaOf(w), 25) * w / SPEED_OF_LIGHT;
  const omegaP = omegaOf(lambdaP);
  const omegaS = omegaOf(lambdaS);
  const length = 0.02;
  const mismatch = k(omegaP) - k(omegaS) - k(omegaP - omegaS);
  const grating = uniformGrating({ start: 0, length, period: 2 * Math.PI / mismatch });
  return {
    omegaP,
    omegaS,
    omegaI: omegaP - omegaS,
    kP: k,
    kS: k,
    kI: k,
    samePolarisation: true,
    d: 22e-12,
    effectiveArea: 40e-12,
    length,
    spectrum: (band) => gratingSpectrum(grating, band),
    pump: { kind: "continuous", averagePower: 1e-3 },
    ...over,
  };
}
const flat = (centre: number, fwhm = 0.8e-9): Filter => ({ shape: "flat-top", fwhm, peak: 1, centre });
const pulsed = (tau: number): PairSource["pump"] => ({
  kind: "pulsed",
  spectrum: pulse("gaussian", tau, lambdaP),
  averagePower: 1e-3,
  repetition: 80e6,
});

Deno.test("degenerate type 0 counts half of the line", () => {
  const steady = pairSpectrum(cln(1550e-9));
  assert.equal(steady.separable, false);
  // ∫|φ|² over the upper half by a plain sum of (2/π)²sinc²(ΔβL/2), Δβ less its value at the centre
  const { source, k, gain } = prepareSource(cln(1550e-9));
  const [, top] = steady.windowS.stated;
  const n = 20_000;
  const h = (top - source.omegaS) / n;
  let sum = 0;
  for (let q = 0; q < n; q++) {
    const x = (q + 0.5) * h;
    const delta = -(k.signal.at(source.omegaS + x) + k.idler.at(source.omegaI - x));
    const u = delta * source.length / 2;
    sum += (2 / Math.PI) ** 2 * (Math.sin(u) / u) ** 2 * h;
  }
  assertClose(steady.made, 1e-3 * gain * sum / (2 * Math.PI), { rel: 5e-3 });
});

Deno.test("degenerate type 0 under pulses is the mean of continuous waves over the pump's spectrum", () => {
  // the group delay of pump and pairs differs by far more than the pairs' own: a detuned pump makes other rates
  const pump = pulse("gaussian", 5e-12, lambdaP);
  const base = cln(1550e-9);
  const train = pairSpectrum({ ...base, pump: pulsed(5e-12) });
  assert.equal(train.grid.converged, true);
  let sum = 0;
  const n = 48;
  const h = 3.2 * pump.fwhm / n;
  for (let q = 0; q < n; q++) {
    const x = -1.6 * pump.fwhm + (q + 0.5) * h;
    const half = (base.omegaP + x) / 2;
    const steady = pairSpectrum({ ...base, omegaP: base.omegaP + x, omegaS: half, omegaI: half });
    sum += pump.envelope(x) ** 2 * steady.made * h / (2 * Math.PI);
  }
  assertClose(train.made * 80e6, sum, { rel: 3e-3 });
});

Deno.test("two channels about the centre are separable, count each pair once, and either may be the signal", () => {
  const upper = 1540e-9;
  const lower = lambdaOf(omegaOf(lambdaP) - omegaOf(upper));
  for (const pump of [{ kind: "continuous", averagePower: 1e-3 } as const, pulsed(3e-12)]) {
    const a = pairSpectrum(cln(1550e-9, { pump, filters: { signal: flat(upper), idler: flat(lower) } }));
    const b = pairSpectrum(cln(1550e-9, { pump, filters: { signal: flat(lower), idler: flat(upper) } }));
    assert.ok(a.separable && b.separable);
    assertClose(a.made, b.made, { rel: 1e-6 });
    assertClose(a.madeOpen, b.madeOpen, { rel: 1e-3 });
    assertClose(a.shares!.signal, b.shares!.idler, { rel: 2e-3 });
    assertClose(a.exchange.value!, 0, { abs: 1e-12 });
    // 101 GHz and 98.6 GHz: of the wider channel's partners 97.5 % fit the mirrored one, fewer with 147 GHz of pump
    const [fits, all] = [a.shares!.idlerGivenSignal.value!, a.shares!.signalGivenIdler.value!];
    if (pump.kind === "continuous") {
      assertClose(fits, (upper / lower) ** 2, { rel: 1e-3 });
      assertClose(all, 1, { rel: 1e-9 });
    } else assert.ok(fits > 0.3 && fits < 0.7 && all > fits, `${fits} ${all}`);
  }
});

Deno.test("arms far apart are separable, but of nearly equal group delay: filters give both an end", () => {
  const open = pairSpectrum(cln(1300e-9, { pump: pulsed(3e-12) }));
  assert.equal(open.separable, true);
  assert.equal(open.purity.value === null && open.purity.reason, "needs filters");
  const filters = { signal: flat(1300e-9, 2e-9), idler: flat(1919.05e-9, 6e-9) };
  const got = pairSpectrum(cln(1300e-9, { pump: pulsed(3e-12), filters }));
  assert.ok(got.purity.value! > 0 && got.purity.value! < 1);
  assert.equal(got.exchange.value, 0);
});
