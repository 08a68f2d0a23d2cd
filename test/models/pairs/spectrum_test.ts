// Pulsed and continuous sources from k(ω) to figures, against closed forms.
import assert from "node:assert/strict";
import { differenceFrequencyPrefactor } from "../../../models/conversion/mod.ts";
import { assertClose } from "../../assert_close.ts";
import {
  jointAmplitude,
  type PairSpectrum,
  pairSpectrum,
  parametricStrength,
  prepareSource,
  pulse,
  recordedPulse,
} from "../../../models/pairs/mod.ts";
import { SPEED_OF_LIGHT, VACUUM_PERMITTIVITY } from "../../../shared/constants.ts";
import { lambdaOf, omegaOf } from "../../../shared/units.ts";
import { analyticSpectrum, ktpSource, linearSource, pulses, sinc } from "./cases.ts";

/** ψ = exp(−(γ + iδ)x²). */
const gaussianPsi = (gamma: number, chirp = 0) => (x: number): [number, number] => {
  const size = Math.exp(-gamma * x * x);
  return [size * Math.cos(chirp * x * x), -size * Math.sin(chirp * x * x)];
};

const purityOf = (s: PairSpectrum): number => {
  assert.ok(s.purity.value !== null, JSON.stringify(s.purity));
  return s.purity.value;
};

Deno.test("parametricStrength() is 2ω_sω_i d²/(ε₀c³n_pn_sn_iA)", () => {
  const [omegaS, omegaI] = [1.2e15, 1.1e15];
  const got = parametricStrength({
    omegaS,
    omegaI,
    nP: 1.8,
    nS: 1.7,
    nI: 1.9,
    d: -4e-12,
    effectiveArea: 3e-11,
  });
  const expected = 2 * omegaS * omegaI * 16e-24 /
    (VACUUM_PERMITTIVITY * SPEED_OF_LIGHT ** 3 * 1.8 * 1.7 * 1.9 * 3e-11);
  assertClose(got, expected, { rel: 1e-14 });
  assert.throws(
    () => parametricStrength({ omegaS, omegaI, nP: 1.8, nS: 1.7, nI: NaN, d: 1e-12, effectiveArea: 3e-11 }),
    /nI = NaN/,
  );
});

Deno.test("a source with Gaussian phase matching has the closed-form purity of its double Gaussian, chirps included", () => {
  // f = exp(−ax²−by²−2cxy) with ρ = τ²/8ln2 − i·gdd/2: a = ρ + γa_s², b = ρ + γa_i², c = ρ + γa_sa_i
  const tau = 1e-12;
  for (
    const [aS, aI, gdd, chirp] of [[1.5e-10, -1.5e-10, 0, 0], [1.5e-10, -1.2e-10, 4e-25, 0], [
      2e-10,
      -0.4e-10,
      -3e-25,
      2e-6,
    ]] as const
  ) {
    const gamma = 3e-6;
    const source = linearSource({
      aS,
      aI,
      psi: gaussianPsi(gamma, chirp),
      centre: 0.005,
      pump: pulses(pulse("gaussian", tau, 791e-9, gdd)),
    });
    const rho = tau * tau / (8 * Math.LN2);
    const [a, b, c] = [[aS, aS], [aI, aI], [aS, aI]].map(([u, v]) => ({
      re: rho + gamma * u! * v!,
      im: -gdd / 2 + chirp * u! * v!,
    }));
    const expected = Math.sqrt((a!.re * b!.re - c!.re ** 2) / (a!.re * b!.re + c!.im ** 2));
    const got = pairSpectrum(source);
    assertClose(purityOf(got), expected, { abs: 1e-7 }, `a ${aS} ${aI}`);
    assert.equal(got.grid.converged, true);
    // ∬|α|²|φ|²: |α|² integrates to the energy along ω_s + ω_i, |φ|² is a Gaussian of the other direction
    const energy = 1e-4 / 76e6;
    const strength = prepareSource(source).gain;
    const integral = Math.PI / (2 * Math.sqrt(a!.re * b!.re - c!.re ** 2));
    const peak = pulse("gaussian", tau, 791e-9).envelope(0);
    assertClose(got.made, strength * energy * peak ** 2 * integral / (2 * Math.PI) ** 2, { rel: 1e-8 });
  }
});

Deno.test("the position of the grating in the guide turns phases, and with pump dispersion also the purity", () => {
  const base = { aS: 1.5e-10, aI: -1.5e-10, psi: gaussianPsi(3e-6) };
  const plain = linearSource(base);
  const bent = (z: number, gdd: number) => {
    const moved = linearSource({ ...base, centre: z, pump: pulses(pulse("gaussian", 1e-12, 791e-9, gdd)) });
    return purityOf(pairSpectrum({ ...moved, kP: (w) => moved.kP(w) + 1e-23 * (w - moved.omegaP) ** 2 / 2 }));
  };
  const straight = purityOf(pairSpectrum(plain));
  assertClose(purityOf(pairSpectrum(linearSource({ ...base, centre: 0.02 }))), straight, { abs: 1e-9 });
  // group-delay dispersion k″·z on the way to the grating's centre is a chirp of the pump there
  assert.ok(Math.abs(bent(0.02, 0) - straight) > 0.01);
  assertClose(bent(0.02, -0.02 * 1e-23), bent(0, 0), { abs: 1e-7 });
});

Deno.test("a symmetric sinc source has 0.81 to 0.83, by its window of ten zeros", () => {
  // windows ±10 and ±20 of τω give 0.830 and 0.815 (pairs.json); ten zeros to each side are ±15.7
  const L = 0.01;
  const a = 1.5e-10;
  let best = 0;
  for (let tau = 0.7e-12; tau < 1.2e-12; tau += 0.05e-12) {
    const source = linearSource({
      aS: a,
      aI: -a,
      psi: (x) => [2 / Math.PI * sinc(x * L / 2), 0],
      pump: pulses(pulse("gaussian", tau, 791e-9)),
    });
    best = Math.max(best, purityOf(pairSpectrum(source)));
  }
  assert.ok(best > 0.815 && best < 0.83, `${best}`);
});

Deno.test("pair numbers do not depend on pulse length or chirp when everything is in the window", () => {
  const made = [0.5e-12, 1e-12, 3e-12].flatMap((tau) =>
    [0, 5e-25].map((gdd) =>
      pairSpectrum(linearSource({
        aS: 1.5e-10,
        aI: -1.5e-10,
        psi: gaussianPsi(3e-6),
        pump: pulses(pulse("gaussian", tau, 791e-9, gdd)),
      })).made
    )
  );
  for (const m of made) assertClose(m, made[0]!, { rel: 1e-7 });
});

Deno.test("pulses and a continuous wave of one power make the same pairs per second", () => {
  const source = ktpSource();
  const pulsed = pairSpectrum(source);
  const steady = pairSpectrum({ ...source, pump: { kind: "continuous", averagePower: 1e-4 } });
  // the ends of the windows cut both a little differently
  assertClose(steady.made, pulsed.made * 76e6, { rel: 2e-3 });
  assert.deepEqual(steady.purity, { value: null, reason: "not a figure of a continuous-wave pump" });
});

/** KTP with the sinc of exactly 10 mm: a real grating ends with its last whole domain. Continuous pump of 1 mW. */
function idealKtp() {
  const source = ktpSource({ lambdaP: 791e-9 });
  const spectrum = analyticSpectrum(
    (x) => [2 / Math.PI * sinc(x * source.length / 2), 0],
    prepareSource(source).k.mismatch,
  );
  return { ...source, spectrum, pump: { kind: "continuous", averagePower: 1e-3 } } as const;
}

Deno.test("a continuous pump's signal is λ²·0.8858929/(L|Δn_g|) wide: 2.508 nm for 10 mm of KTP", () => {
  // check values A3, type-II bandwidth of a cw pump at 1582 nm, L = 10 mm (recomputed there)
  const steady = pairSpectrum(idealKtp());
  assertClose(steady.bandwidthS.value!, 2.508e-9, { rel: 5e-4 });
  assertClose(steady.bandwidthI.value!, 2.508e-9, { rel: 5e-4 });
});

Deno.test("a continuous pump's rate is PΓ²L²∫|φ|²dω/2π: (2/π)²·PΓ²L/|Δk′| for a whole sinc²", () => {
  const source = idealKtp();
  const { gain, k, windowS } = prepareSource(source);
  const [lo, hi] = windowS.stated;
  const delay = Math.abs((k.signal.at(hi) - k.signal.at(lo)) - (k.idler.at(hi) - k.idler.at(lo))) / (hi - lo);
  const expected = 1e-3 * gain * (2 / Math.PI) ** 2 / (source.length * delay);
  // ten zeros to each side leave 1/(10π²) of a sinc² outside
  assertClose(pairSpectrum(source).made / expected, 1 - 1 / (10 * Math.PI ** 2), { abs: 3e-4 });
});

Deno.test("Γ² is the photon gain of difference frequency: what a weak signal grows by is what vacuum makes", () => {
  const [lambdaS, lambdaI] = [1500e-9, 1 / (1 / 791e-9 - 1 / 1500e-9)];
  const waves = { lambdaP: 791e-9, lambdaS, lambdaI, polP: "TE", polS: "TE", polI: "TM" } as const;
  const at = { d: 4e-12, effectiveArea: 3e-11 };
  const idlerPower = differenceFrequencyPrefactor({ waves, n: { p: 1.8, s: 1.7, i: 1.9 }, ...at });
  const [omegaS, omegaI] = [omegaOf(lambdaS), omegaOf(lambdaI)];
  const strength = parametricStrength({ omegaS, omegaI, nP: 1.8, nS: 1.7, nI: 1.9, ...at });
  assertClose(strength, idlerPower * omegaS / omegaI, { rel: 1e-12 });
});

const band = (fwhm: number, centre = 1582.18e-9, peak = 1, shape: "flat-top" | "gaussian" = "flat-top") => ({
  shape,
  fwhm,
  peak,
  centre,
});

Deno.test("filters reduce counts, and a filter wider than the light takes only its peak", () => {
  const wide = pairSpectrum(ktpSource({ filters: { signal: band(80e-9, 1582.18e-9, 0.9) } }));
  assertClose(wide.shares!.signal, 0.9, { rel: 1e-9 });
  if (wide.shares!.signalGivenIdler.value === null) throw new Error("no share");
  assertClose(wide.shares!.signalGivenIdler.value, 0.9, { rel: 1e-9 });
  let last = 1;
  for (const fwhm of [20e-9, 8e-9, 3e-9, 1e-9]) {
    const { shares } = pairSpectrum(ktpSource({ filters: { signal: band(fwhm) } }));
    assert.ok(shares!.signal < last && shares!.signal > 0, `${fwhm}`);
    assertClose(shares!.both, shares!.signal, { rel: 1e-12 });
    assert.equal(shares!.idler, 1);
    last = shares!.signal;
  }
});

Deno.test("the signal's filter factor counts heralds whose signal the filter blocks", () => {
  // Against ∬ over the whole of both windows by a plain sum on the unfiltered source's grid
  const signal = band(4e-9, 1582.18e-9, 0.95, "gaussian");
  const idler = band(5e-9, 1583e-9, 0.9, "gaussian");
  const got = pairSpectrum(ktpSource({ filters: { signal, idler }, grid: { points: 128, limit: 256 } }));
  const free = ktpSource({ grid: { points: 512 } });
  const t = (f: typeof signal, w: number) =>
    f.peak * Math.exp(-4 * Math.LN2 * ((lambdaOf(w) - f.centre) / f.fwhm) ** 2);
  const { amplitude: f, signal: s, idler: i } = jointAmplitude(prepareSource(free), 512);
  let [total, sums, sumi, both] = [0, 0, 0, 0];
  for (let j = 0; j < f.rows; j++) {
    for (let l = 0; l < f.cols; l++) {
      const square = f.re[j * f.cols + l]! ** 2 + f.im[j * f.cols + l]! ** 2;
      const [a, b] = [t(signal, s.omega[j]!), t(idler, i.omega[l]!)];
      total += square;
      sums += a * square;
      sumi += b * square;
      both += a * b * square;
    }
  }
  assertClose(got.madeOpen, total, { rel: 1e-4 });
  assertClose(got.shares!.signal, sums / total, { rel: 3e-4 });
  assertClose(got.shares!.idler, sumi / total, { rel: 3e-4 });
  assertClose(got.shares!.signalGivenIdler.value!, both / sumi, { rel: 3e-4 });
  assertClose(got.shares!.idlerGivenSignal.value!, both / sums, { rel: 3e-4 });
  assert.ok(got.made < got.madeOpen);
});

Deno.test("narrow filters purify, and the bandwidths are then the filters'", () => {
  const got = pairSpectrum(ktpSource({ filters: { signal: band(0.2e-9), idler: band(0.2e-9) } }));
  assert.ok(purityOf(got) > 0.98, `${purityOf(got)}`);
  assertClose(got.bandwidthS.value!, 0.2e-9, { rel: 1e-6 });
  assertClose(got.bandwidthI.value!, 0.2e-9, { rel: 1e-6 });
});

Deno.test("filters that pass no pair leave null, with the reason", () => {
  const apart = pairSpectrum(
    ktpSource({ filters: { signal: band(1e-9, 1575e-9), idler: band(1e-9, 1570e-9) } }),
  );
  assert.equal(apart.purity.value === null && apart.purity.reason, "no pair passes the filters");
  const shut = pairSpectrum(ktpSource({ filters: { signal: band(2e-9, 1582.18e-9, 0) } }));
  assert.equal(shut.purity.value, null);
  assert.equal(shut.shares!.signalGivenIdler.value, 0);
  assert.equal(shut.shares!.idlerGivenSignal.value, null);
  assert.equal(shut.bandwidthS.value, null);
});

Deno.test("one polarisation: each pair is counted once, and what needs two arms is null", () => {
  // two arms of different group delay but one polarisation: half of the pairs of the same arms told apart
  const shape = { aS: 1.5e-10, aI: -1.5e-10, psi: (x: number): [number, number] => [sinc(x * 0.005), 0] };
  const apart = pairSpectrum(linearSource(shape));
  const one = pairSpectrum(linearSource({ ...shape, samePolarisation: true }));
  assert.equal(one.separable, false);
  assertClose(one.made, apart.made / 2, { rel: 2e-3 });
  assert.equal(one.shares, null);
  for (const x of [one.purity, one.exchange]) {
    assert.equal(x.value === null && x.reason, "signal and idler not separable");
  }
  assertClose(one.bandwidthS.value!, apart.bandwidthS.value!, { rel: 1e-2 });
  const steady = { kind: "continuous", averagePower: 1e-4 } as const;
  const line = pairSpectrum(linearSource({ ...shape, pump: steady }));
  const half = pairSpectrum(linearSource({ ...shape, pump: steady, samePolarisation: true }));
  assertClose(half.made, line.made / 2, { rel: 1e-6 });
});

Deno.test("one polarisation: filters that tell the arms apart bring all figures back", () => {
  const shape = { aS: 1.5e-10, aI: -1.5e-10, psi: (x: number): [number, number] => [sinc(x * 0.005), 0] };
  const filters = {
    signal: band(1e-9, 1580e-9),
    idler: band(1e-9, lambdaOf(omegaOf(791e-9) - omegaOf(1580e-9))),
  };
  const got = pairSpectrum(linearSource({ ...shape, samePolarisation: true, filters }));
  const apart = pairSpectrum(linearSource({ ...shape, filters }));
  assert.equal(got.separable, true);
  assertClose(purityOf(got), purityOf(apart), { rel: 1e-9 });
  assertClose(got.made, apart.made, { rel: 1e-9 });
  assert.equal(got.exchange.value, 0);
  assert.ok(got.madeOpen < 0.6 * apart.madeOpen);
});

Deno.test("arms of equal group delay have no end: counted within ±5 %, purity needs filters", () => {
  const shape = { aS: 1e-10, aI: 1e-10, psi: gaussianPsi(3e-6) };
  const open = pairSpectrum(linearSource({ ...shape, grid: { points: 128, limit: 128 } }));
  assert.equal(open.purity.value === null && open.purity.reason, "needs filters");
  assertClose(open.windowS.stated[1] / omegaOf(1582e-9), 1.05, { rel: 1e-9 });
  assert.equal(open.bandwidthS.value, null);
  const filters = { signal: band(5e-9, 1582e-9), idler: band(5e-9, 1582e-9) };
  assert.ok(purityOf(pairSpectrum(linearSource({ ...shape, filters }))) > 0);
});

Deno.test("exchange overlap of a symmetric source is 1 at the walk-off of half the crystal", () => {
  // pairs are born at the middle on average: τ = |k′_s − k′_i|·L/2, and the group delays differ by 2a
  const L = 0.01;
  const a = 1.5e-10;
  const shape = { aS: a, aI: -a, psi: (x: number): [number, number] => [sinc(x * L / 2), 0], centre: L / 2 };
  for (const pump of [undefined, { kind: "continuous", averagePower: 1e-3 } as const]) {
    const got = pairSpectrum(linearSource({ ...shape, ...(pump === undefined ? {} : { pump }) }));
    assertClose(got.exchange.value!, 1, { rel: 1e-6 });
    assertClose(Math.abs(got.exchangeDelay!), a * L, { rel: 1e-3 });
  }
});

Deno.test("exchange overlap falls when one arm's filter is moved, by the share of wavelengths in common", () => {
  // continuous pump, flat φ: overlap of two bands of ±1 nm a distance apart about the mirror frequency
  const flat = { aS: 1e-10, aI: -1e-10, psi: (): [number, number] => [1, 0], length: 0.01 };
  const pump = { kind: "continuous", averagePower: 1e-3 } as const;
  const filters = { signal: band(2e-9, 1582.5e-9) };
  const got = pairSpectrum(linearSource({ ...flat, pump, filters }));
  // band 1581.5 … 1583.5 about 1582: mirror-symmetric part ±0.5 of 2 nm wide
  assertClose(got.exchange.value!, 0.5, { abs: 3e-3 });
});

Deno.test("a recorded pump gives what its analytic twin gives", () => {
  const p = pulse("gaussian", 1e-12, 791.09e-9, 2e-25);
  const rows = Array.from({ length: 1201 }, (_, k) => {
    const x = (p.lo + k / 1200 * (p.hi - p.lo)) / 1.5;
    const lambda = lambdaOf(p.carrier + x);
    return { lambda, intensity: p.envelope(x) ** 2 / lambda ** 2 };
  });
  const a = pairSpectrum(ktpSource({ pump: pulses(p) }));
  const b = pairSpectrum(ktpSource({ pump: pulses(recordedPulse(rows, 791.09e-9, 2e-25)) }));
  assertClose(purityOf(b), purityOf(a), { abs: 1e-4 });
  assertClose(b.made, a.made, { rel: 1e-4 });
});

Deno.test("a pump too narrow for the largest grid is never called converged", () => {
  const rough = linearSource({
    aS: 1.5e-10,
    aI: -1.5e-10,
    psi: gaussianPsi(3e-9),
    grid: { points: 8, limit: 8 },
    filters: { signal: band(60e-9, 1582e-9), idler: band(60e-9, 1582e-9) },
    pump: pulses(pulse("gaussian", 2e-14, 791e-9)),
  });
  const got = pairSpectrum(rough);
  assert.equal(got.grid.points, 8);
  const single = pairSpectrum({ ...rough, grid: { points: 8, compare: false } });
  assert.equal(single.grid.converged, null);
  const narrow = pairSpectrum({
    ...rough,
    pump: pulses(pulse("gaussian", 2e-10, 791e-9)),
    grid: { points: 64, limit: 128 },
  });
  assert.equal(narrow.grid.converged, false);
});
