import assert from "node:assert/strict";
import {
  newPairScratch,
  type PairSource,
  pairSpectrum,
  pairSpectrumDraws,
  prepareSource,
} from "../../../models/pairs/mod.ts";
import { gratingSpectrum, realiseGrating } from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";
import { ktpSource } from "./cases.ts";

const length = 0.01;

/** φ of a grating with jittered walls and missing domains, with pump loss. */
function jittered(seed: number): PairSource["spectrum"] {
  const period = 2 * Math.PI / Math.abs(prepareSource(ktpSource()).k.mismatch);
  const grating = realiseGrating({ start: 0, length, period, dutySd: 0.1, missing: 0.05 }, randomFrom(seed));
  return (band) => gratingSpectrum(grating, band, { decay: 2 });
}

const filters = {
  signal: { shape: "flat-top", fwhm: 8e-9, peak: 0.9, centre: 1582.18e-9 },
  idler: { shape: "gaussian", fwhm: 6e-9, peak: 0.8, centre: 1582.18e-9 },
} as const;
const cases: Record<string, PairSource> = {
  "open windows": ktpSource(),
  "filtered arms": ktpSource({ filters }),
  "one filter": ktpSource({ filters: { signal: filters.signal } }),
  "a continuous pump": ktpSource({ filters, pump: { kind: "continuous", averagePower: 1e-3 } }),
};

for (const [name, source] of Object.entries(cases)) {
  Deno.test(`draws with ${name}: the refined spectrum is the source's own, the base is its half grid`, () => {
    const draws = pairSpectrumDraws(source);
    assert.deepEqual(draws.refined, pairSpectrum(source));
    const points = draws.refined.grid.points / 2;
    const half = pairSpectrum({ ...source, grid: { points, limit: points, compare: false } });
    assert.equal(draws.base.grid.points, points);
    assertClose(draws.base.made, half.made, { rel: 1e-6 });
    assert.deepEqual(draws.draw(source.spectrum), draws.base);
  });

  Deno.test(`draws with ${name}: another grating gives what a source of its own gives, in any order`, () => {
    const scratch = newPairScratch();
    const { refined, base, draw } = pairSpectrumDraws(source, scratch);
    const [first, second] = [draw(jittered(1)), draw(jittered(2))];
    assert.deepEqual(draw(jittered(1)), first);
    assert.notEqual(first.made, second.made);
    for (const [seed, drawn] of [[1, first], [2, second]] as const) {
      const own = pairSpectrum({ ...source, spectrum: jittered(seed) });
      assertClose(refined.made * drawn.made / base.made, own.made, { rel: 1e-3 });
      if (own.purity.value !== null) {
        const carried = refined.purity.value! * drawn.purity.value! / base.purity.value!;
        assertClose(carried, own.purity.value, { abs: 1e-3 });
      }
      assertClose(drawn.exchange.value!, own.exchange.value!, { abs: 2e-3 });
    }
  });
}
