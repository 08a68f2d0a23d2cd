import assert from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  absent,
  assembleFigures,
  given,
  type Outcome,
  PAIR_FIGURES,
  type PairChain,
  pairFigures,
  pairSpectrum,
  pairSurvival,
  pulse,
} from "../../../models/pairs/mod.ts";
import { ktpSource, pulses } from "./cases.ts";

const chain: PairChain = {
  guideLength: 0.012,
  poled: [{ from: 0.001, to: 0.011 }],
  losses: { pump: 20, signal: 11.5, idler: 9 },
  signal: { facet: given(0.915), coupling: given(0.8), detector: given(0.85), dark: 100 },
  idler: { facet: given(0.9), coupling: given(0.75), detector: given(0.8), dark: 200 },
  window: 1e-9,
};
const gauss = { shape: "gaussian", fwhm: 4e-9, peak: 0.9, centre: 1582.18e-9 } as const;
const value = (x: Outcome): number => {
  assert.ok(x.value !== null, JSON.stringify(x));
  return x.value;
};
const reason = (x: Outcome): string => {
  assert.ok(x.value === null, JSON.stringify(x));
  return x.reason;
};

Deno.test("every figure is given for a pulsed type-II source, and each budget is the product of its factors", () => {
  const source = ktpSource({ filters: { signal: gauss } });
  const { figures: f, windowS, windowI, grid, exchangeDelay, remarks } = pairFigures(source, {
    ...chain,
    g2Limit: 0.02,
  });
  assert.deepEqual(Object.keys(f).sort(), [...PAIR_FIGURES].sort());
  for (const name of PAIR_FIGURES) if (name !== "pair_rate_hz") value(f[name]);
  assert.equal(reason(f.pair_rate_hz), "a figure of a continuous-wave pump; see pairs_per_pulse");
  for (const arm of ["signal", "idler"] as const) {
    const product = (["survival", "facet", "coupling", "filter", "detector"] as const)
      .map((name) => value(f[`${name}_${arm}`])).reduce((a, b) => a * b, 1);
    assertClose(value(f[`heralding_${arm}`]), product, { rel: 1e-12 }, arm);
  }
  assertClose(value(f.schmidt_number), 1 / value(f.purity), { rel: 1e-12 });
  assertClose(value(f.window_signal_nm), (windowS[1] - windowS[0]) * 1e9, { rel: 1e-12 });
  assertClose(value(f.window_signal_nm), 16, { rel: 1e-6 });
  assert.ok(windowI[0] < 1582e-9 && windowI[1] > 1582e-9);
  assert.ok(grid.converged === true && exchangeDelay !== null);
  assert.deepEqual(remarks, []);
});

Deno.test("heralding is joint over single detections, and CAR uses the same ones", () => {
  const source = ktpSource({ filters: { signal: gauss, idler: gauss } });
  const spectrum = pairSpectrum(source);
  const { figures: f } = assembleFigures(spectrum, source.pump, chain);
  const s = pairSurvival(chain.losses, chain.guideLength, chain.poled);
  const shares = spectrum.shares!;
  const seenS = s.signal * 0.915 * 0.8 * 0.85 * shares.signal;
  const seenI = s.idler * 0.9 * 0.75 * 0.8 * shares.idler;
  const both = s.joint * 0.915 * 0.8 * 0.85 * 0.9 * 0.75 * 0.8 * shares.both;
  assertClose(value(f.heralding_signal), both / seenI, { rel: 1e-12 });
  assertClose(value(f.heralding_idler), both / seenS, { rel: 1e-12 });
  const accidentals = (spectrum.madeOpen * seenS + 1e-7) * (spectrum.madeOpen * seenI + 2e-7);
  assertClose(value(f.car), 1 + spectrum.madeOpen * both / accidentals, { rel: 1e-12 });
});

Deno.test("without filters g2_heralded is n̄(1+P)(2−η) with the idler's own survival, facet, coupling and detector", () => {
  const source = ktpSource();
  const { figures: f } = pairFigures(source, chain);
  const eta = pairSurvival(chain.losses, chain.guideLength, chain.poled).idler * 0.9 * 0.75 * 0.8;
  const expected = value(f.pairs_per_pulse) * (1 + value(f.purity)) * (2 - eta);
  assertClose(value(f.g2_heralded), expected, { rel: 1e-10 });
  assertClose(value(f.g2_unheralded), 1 + value(f.purity), { rel: 1e-12 });
  assert.match(reason(f.pump_power_at_g2_mw), /no upper limit/);
});

Deno.test("pump_power_at_g2_mw is the power at which g2_heralded is the limit", () => {
  const { figures: f } = pairFigures(ktpSource(), { ...chain, g2Limit: 0.03 });
  const power = value(f.pump_power_at_g2_mw);
  const there = ktpSource({ pump: pulses(pulse("gaussian", 1e-12, 791.09e-9), power * 1e-3) });
  assertClose(value(pairFigures(there, chain).figures.g2_heralded), 0.03, { rel: 1e-10 });
});

Deno.test("above 0.1 pairs per pulse the figures carry beyond_low_gain", () => {
  const strong = ktpSource({ pump: pulses(pulse("gaussian", 1e-12, 791.09e-9), 2e-3) });
  const { remarks, figures } = pairFigures(strong, chain);
  assert.ok(value(figures.pairs_per_pulse) > 0.1);
  assert.ok(remarks.some((r) => r.startsWith("beyond_low_gain")), remarks.join());
  const far = pairFigures(ktpSource(), { ...chain, g2Limit: 1 }).remarks;
  assert.ok(far.some((r) => r.startsWith("pump_power_at_g2_mw")), far.join());
});

Deno.test("an unknown coupling makes null what needs it, with its reason, and leaves the rest", () => {
  const blind = { ...chain, idler: { ...chain.idler, coupling: absent("no mode size is known") } };
  const { figures: f } = pairFigures(ktpSource(), { ...blind, g2Limit: 0.1 });
  for (
    const name of ["heralding_idler", "coupling_idler", "g2_heralded", "car", "pump_power_at_g2_mw"] as const
  ) {
    assert.equal(reason(f[name]), "no mode size is known", name);
  }
  for (
    const name of ["heralding_signal", "purity", "g2_unheralded", "pairs_per_pulse", "facet_idler"] as const
  ) {
    value(f[name]);
  }
});

Deno.test("without operating point the pair figures are null and the budget stays", () => {
  const why = "no temperature in the oven's range matches the phases";
  const { figures: f } = pairFigures(ktpSource(), { ...chain, unmatched: why });
  for (
    const name of [
      "purity",
      "pairs_per_pulse",
      "car",
      "g2_heralded",
      "exchange_overlap",
      "bandwidth_signal_nm",
    ] as const
  ) {
    assert.equal(reason(f[name]), why, name);
  }
  for (const name of ["heralding_signal", "survival_idler", "filter_signal", "detector_idler"] as const) {
    value(f[name]);
  }
});

Deno.test("arms of one polarisation and wavelength have no heralding, filters or CAR of their own", () => {
  const { figures: f } = pairFigures(ktpSource({ samePolarisation: true }), chain);
  for (
    const name of [
      "purity",
      "schmidt_number",
      "g2_unheralded",
      "g2_heralded",
      "heralding_signal",
      "heralding_idler",
      "filter_signal",
      "car",
      "exchange_overlap",
    ] as const
  ) assert.equal(reason(f[name]), "signal and idler not separable", name);
  value(f.pairs_per_pulse);
  value(f.survival_signal);
  value(f.facet_signal);
});

Deno.test("a continuous pump has rates instead of pulses and claims no purity", () => {
  const source = { ...ktpSource(), pump: { kind: "continuous", averagePower: 1e-4 } } as const;
  const { figures: f } = pairFigures(source, chain);
  assert.ok(value(f.pair_rate_hz) > 1e5);
  for (
    const name of [
      "pairs_per_pulse",
      "purity",
      "schmidt_number",
      "g2_unheralded",
      "g2_heralded",
      "pump_power_at_g2_mw",
    ] as const
  ) assert.equal(reason(f[name]), "not a figure of a continuous-wave pump", name);
  for (const name of ["car", "exchange_overlap", "heralding_signal", "bandwidth_idler_nm"] as const) {
    value(f[name]);
  }
});

Deno.test("more loss never gives more heralding, whatever the arms", () => {
  const spectrum = pairSpectrum(ktpSource({ filters: { signal: gauss }, grid: { points: 32, limit: 32 } }));
  const { pump } = ktpSource();
  const loss = fc.double({ min: 0, max: 200, noNaN: true });
  fc.assert(fc.property(loss, loss, loss, loss, (p, s, i, more) => {
    const at = (signal: number) =>
      value(
        assembleFigures(spectrum, pump, { ...chain, losses: { pump: p, signal, idler: i } }).figures
          .heralding_signal,
      );
    const [a, b] = [at(s), at(s + more)];
    assert.ok(a > 0 && a <= 1 && b <= a * (1 + 1e-12));
  }));
});
