import assert from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  absent,
  assembleBudget,
  given,
  klyshko,
  pairSurvival,
  poledStretches,
} from "../../../models/pairs/mod.ts";
import { PUBLISHED } from "./matrices.ts";

Deno.test("klyshko() gives the published worked example", () => {
  // fixtures/check-values/pairs.json, klyshko (from memory, recomputed)
  const { S_s, S_i, C, t_w_s, ...expected } = PUBLISHED.klyshko.example;
  const plain = klyshko({ signal: S_s, idler: S_i, coincidences: C });
  assertClose(plain.idler, expected.eta_idler, { rel: 1e-12 });
  assertClose(plain.signal, expected.eta_signal, { rel: 1e-12 });
  const net = klyshko({ signal: S_s, idler: S_i, coincidences: C, window: t_w_s });
  assertClose(net.accidentals, expected.accidentals_per_s, { rel: 1e-12 });
  assertClose(net.idler, expected.eta_idler_corrected, { rel: 1e-12 });
  assert.throws(() => klyshko({ signal: 0, idler: 1, coincidences: 0 }), RangeError);
});

/** Midpoint sum of e^{−α(L−z)}e^{−α_p z} over the stretches. */
function summed(alpha: number, pump: number, length: number, poled: { from: number; to: number }[]): number {
  let sum = 0;
  for (const { from, to } of poled) {
    const n = 4000;
    for (let k = 0; k < n; k++) {
      const z = from + (k + 0.5) * (to - from) / n;
      sum += Math.exp(-alpha * (length - z) - pump * z) * (to - from) / n;
    }
  }
  return sum;
}

Deno.test("pairSurvival() equals the integrals of its definition, with gaps", () => {
  const losses = { pump: 30, signal: 23, idler: 7 };
  const poled = [{ from: 0.002, to: 0.006 }, { from: 0.007, to: 0.019 }];
  const got = pairSurvival(losses, 0.022, poled);
  const at = (alpha: number) => summed(alpha, 30, 0.022, poled);
  assertClose(got.signal, at(23) / at(0), { rel: 1e-7 });
  assertClose(got.idler, at(7) / at(0), { rel: 1e-7 });
  assertClose(got.joint, at(30) / at(0), { rel: 1e-7 });
  assertClose(got.signalGivenIdler, at(30) / at(7), { rel: 1e-7 });
  assertClose(got.idlerGivenSignal, at(30) / at(23), { rel: 1e-7 });
});

Deno.test("pairSurvival() of a guide poled all along has the closed form (1−e^{−αL})/αL", () => {
  const { signal } = pairSurvival({ pump: 0, signal: 50, idler: 1 }, 0.02, [{ from: 0, to: 0.02 }]);
  assertClose(signal, (1 - Math.exp(-1)) / 1, { rel: 1e-13 });
});

Deno.test("pairSurvival() is exact where losses vanish or are tiny", () => {
  const poled = [{ from: 0.001, to: 0.009 }];
  const none = pairSurvival({ pump: 0, signal: 0, idler: 0 }, 0.01, poled);
  assert.deepEqual(Object.values(none), [1, 1, 1, 1, 1]);
  for (const alpha of [1e-14, 1e-9, 1e-5]) {
    const { signal } = pairSurvival({ pump: 0, signal: alpha, idler: 0 }, 0.01, poled);
    // mean way to the facet: 5 mm
    assertClose((1 - signal) / (alpha * 0.005), 1, { abs: 1e-2 + 3e-14 / (alpha * 0.005) }, `α = ${alpha}`);
  }
});

Deno.test("survival lies in (0, 1], and knowing that the partner arrived never makes it worse", () => {
  const loss = fc.double({ min: 0, max: 500, noNaN: true });
  fc.assert(fc.property(loss, loss, loss, fc.double({ min: 0.1, max: 0.9, noNaN: true }), (p, s, i, at) => {
    const poled = [{ from: 0, to: 0.01 * at }, { from: 0.01 * at + 1e-4, to: 0.011 }];
    const got = pairSurvival({ pump: p, signal: s, idler: i }, 0.012, poled);
    for (const x of Object.values(got)) assert.ok(x > 0 && x <= 1 + 1e-12, `${x}`);
    assert.ok(got.signalGivenIdler >= got.signal * (1 - 1e-12));
    assert.ok(got.idlerGivenSignal >= got.idler * (1 - 1e-12));
    assertClose(got.signalGivenIdler * got.idler, got.joint, { rel: 1e-12 });
  }));
});

Deno.test("pairSurvival() refuses negative losses and poling outside the guide", () => {
  const all = [{ from: 0, to: 0.01 }];
  assert.throws(() => pairSurvival({ pump: -1, signal: 0, idler: 0 }, 0.01, all), /pump loss -1/);
  assert.throws(() => pairSurvival({ pump: 0, signal: NaN, idler: 0 }, 0.01, all), /signal loss NaN/);
  assert.throws(() => pairSurvival({ pump: 0, signal: 0, idler: 0 }, 0.009, all), /0.009/);
  assert.throws(() => pairSurvival({ pump: 0, signal: 0, idler: 0 }, 0.01, []), /no poled stretch/);
});

Deno.test("poledStretches() takes the gaps out", () => {
  assert.deepEqual(poledStretches(1, 5), [{ from: 1, to: 5 }]);
  assert.deepEqual(poledStretches(1, 5, [{ from: 1, to: 2 }, { from: 3, to: 3.5 }, { from: 4, to: 5 }]), [
    { from: 2, to: 3 },
    { from: 3.5, to: 4 },
  ]);
  assert.deepEqual(poledStretches(1, 2, [{ from: 0, to: 3 }]), []);
});

Deno.test("a budget is the product of its factors, and null with the reason when one is null", () => {
  const factors = {
    survival: given(0.9),
    facet: given(0.86),
    coupling: given(0.7),
    filter: given(0.97),
    detector: given(0.85),
  };
  const full = assembleBudget(factors);
  assertClose(full.total.value!, 0.9 * 0.86 * 0.7 * 0.97 * 0.85, { rel: 1e-15 });
  const blind = assembleBudget({ ...factors, coupling: absent("no mode size known") });
  assert.deepEqual(blind.total, { value: null, reason: "no mode size known" });
  assert.equal(blind.factors.facet.value, 0.86);
  assert.throws(() => assembleBudget({ ...factors, facet: given(1.2) }), /facet 1.2/);
  assert.throws(() => given(NaN), RangeError);
});
