import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import { pairSpectrum, pulse, twoSourceDip } from "../../../models/pairs/mod.ts";
import { ktpSource, linearSource, pulses } from "./cases.ts";

Deno.test("two equal dies dip by their purity, with and without filters", () => {
  const gauss = { shape: "gaussian", fwhm: 4e-9, peak: 0.8, centre: 1582.18e-9 } as const;
  for (const filters of [{}, { signal: gauss }, { signal: gauss, idler: gauss }]) {
    const source = ktpSource({ filters });
    const dip = twoSourceDip(source, source);
    assertClose(dip.value, pairSpectrum(source).purity.value!, { abs: 1e-3 });
    assertClose(dip.delay, 0, { abs: 1e-16 });
  }
});

Deno.test("dies of unlike lengths dip less, either way round", () => {
  const [a, b] = [ktpSource(), ktpSource({ length: 0.013 })];
  const dip = twoSourceDip(a, b).value;
  assert.ok(dip < twoSourceDip(a, a).value && dip > 0.5, `${dip}`);
  assertClose(twoSourceDip(b, a).value, dip, { rel: 1e-6 });
});

Deno.test("pure dies whose centres differ dip as the overlap of their Gaussians", () => {
  // matched widths make the pair separable: ρ is pure, and its packet is a Gaussian of the pump's own width
  const tau = 1e-12;
  const rho = tau * tau / (8 * Math.LN2);
  const aS = 1.5e-10;
  const gamma = rho / aS ** 2;
  // c = ρ + γa_sa_i = 0, so the signal's amplitude is exp(−2ρν²), and ψ moved by x₀ moves it by x₀/2a_s in ν
  const at = (x0: number) =>
    linearSource({
      aS,
      aI: -aS,
      psi: (x) => [Math.exp(-gamma * (x - x0) ** 2), 0],
      pump: pulses(pulse("gaussian", tau, 791e-9)),
    });
  assertClose(twoSourceDip(at(0), at(0)).value, 1, { abs: 1e-6 });
  const shift = 1e12;
  // |∫e^{−2ρν²}e^{−2ρ(ν−s)²}|² over the norms: exp(−2ρs²)
  const expected = Math.exp(-2 * rho * shift ** 2);
  assertClose(twoSourceDip(at(0), at(2 * aS * shift)).value, expected, { abs: 1e-5 });
});

Deno.test("arms that are not separable do not interfere in this picture", () => {
  const same = ktpSource({ samePolarisation: true });
  assert.throws(() => twoSourceDip(same, same), /not separable/);
});
