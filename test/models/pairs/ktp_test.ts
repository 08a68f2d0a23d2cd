// Bulk KTP pumped at 791 nm, type II: the symmetric source of the literature.
import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import { groupIndex } from "../../../models/materials/mod.ts";
import { pairSpectrum, prepareSource, pulse } from "../../../models/pairs/mod.ts";
import { ktpSource, pulses } from "./cases.ts";

Deno.test("KTP near 1582 nm phase-matches along 45°, at a period of 46.15 µm", () => {
  // check values A2: θ = −atan[(ng_p−ng_s)/(ng_p−ng_i)] = 45.019° at 791 nm, 48.553° at 775 nm; Λ = 46.1458 µm at the
  // zero of the group-velocity mismatch (König–Wong n_y, Fradkin n_z; recomputed there)
  const theta = (lambdaP: number) => {
    const { source, k } = prepareSource(
      ktpSource({ lambdaP, pump: pulses(pulse("gaussian", 1e-12, lambdaP)) }),
    );
    const h = 1e12;
    const at = (c: { at(x: number): number }, x: number) => (c.at(x + h) - c.at(x - h)) / (2 * h);
    const s = k.pumpDelay - at(k.signal, source.omegaS);
    const i = k.pumpDelay - at(k.idler, source.omegaI);
    return -Math.atan(s / i) * 180 / Math.PI;
  };
  assertClose(theta(791e-9), 45.019, { abs: 2e-3 });
  assertClose(theta(775e-9), 48.553, { abs: 2e-3 });
  const { k } = prepareSource(ktpSource({ lambdaP: 791.09e-9 }));
  assertClose(2 * Math.PI / Math.abs(k.mismatch), 46.1458e-6, { abs: 1e-10 });
  assert.ok(k.mismatch < 0, "the grating vector of type-II KTP points backwards");
  assert.ok(groupIndex("KTP", "y", 791e-9, 25) > groupIndex("KTP", "y", 1582e-9, 25));
});

Deno.test("KTP's best purity in the stated window of ten zeros lies between 0.81 and 0.83", () => {
  // R.-B. Jin et al., Opt. Express 21, 10659 (2013): 0.81 and above; window ±10 … ±20 of τω: 0.830 … 0.815 (pairs.json)
  for (const length of [0.01, 0.03]) {
    let best = 0;
    for (let tau = 70; tau <= 110; tau += 5) {
      const pump = pulses(pulse("gaussian", tau * length * 1e-12, 791.09e-9));
      const { purity, grid } = pairSpectrum(ktpSource({ length, pump }));
      assert.equal(grid.converged, true);
      best = Math.max(best, purity.value!);
    }
    assert.ok(best > 0.81 && best < 0.83, `${length} m: ${best}`);
  }
});

Deno.test("chirp lowers KTP's purity: 20 000 fs² on 0.85 ps", () => {
  const at = (gdd: number) =>
    pairSpectrum(ktpSource({ pump: pulses(pulse("gaussian", 0.85e-12, 791.09e-9, gdd)) })).purity.value!;
  assert.ok(at(0) - at(4e-25) > 0.1, `${at(0)} ${at(4e-25)}`);
  // pump dispersion up to the grating's middle makes the sign matter a little
  assertClose(at(4e-25), at(-4e-25), { rel: 0.02 });
});

Deno.test("KTP's pairs are symmetric in exchange only with the delay of half the walk-off", () => {
  const { exchange, exchangeDelay } = pairSpectrum(ktpSource());
  assert.ok(exchange.value! > 0.999);
  const walkOff = (groupIndex("KTP", "z", 1582.18e-9, 25) - groupIndex("KTP", "y", 1582.18e-9, 25)) * 0.01 /
    299792458;
  assertClose(Math.abs(exchangeDelay!), walkOff / 2, { rel: 1e-2 });
});

Deno.test("the window makes the number: fewer zeros, higher purity", () => {
  // 0.78 at 3 zeros to 0.73 at 30 was quoted for another pump; here only the direction and the size of the effect
  const within = (fwhm: number) => {
    const filter = { shape: "flat-top", fwhm, peak: 1, centre: 1582.18e-9 } as const;
    return pairSpectrum(ktpSource({ filters: { signal: filter, idler: filter } })).purity.value!;
  };
  const [narrow, wide, widest] = [within(10e-9), within(40e-9), within(160e-9)];
  assert.ok(narrow > wide && wide > widest, `${narrow} ${wide} ${widest}`);
  assert.ok(widest > 0.75);
});
