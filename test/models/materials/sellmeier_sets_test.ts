import assert from "node:assert/strict";
import { SELLMEIER_SETS, type SellmeierId, type SellmeierSet } from "../../../models/materials/mod.ts";
import { assertClose } from "../../assert_close.ts";

interface Published {
  readonly sets: readonly {
    readonly id: string;
    readonly axis: string;
    readonly points: readonly { lambda_um: number; T_C: number; n: number; ng: number }[];
  }[];
}
const published: Published = JSON.parse(Deno.readTextFileSync("fixtures/check-values/sellmeier.json"));

Deno.test("every published set is there, with its axis, and no other", () => {
  assert.deepEqual(
    Object.entries(SELLMEIER_SETS).map(([id, set]) => `${id} ${set.axis}`).sort(),
    published.sets.map((set) => `${set.id} ${set.axis}`).sort(),
  );
});

// Sources: the papers cited with each set (points recomputed from the printed equations).
for (const { id, points } of published.sets) {
  Deno.test(`${id} gives the recomputed index to 1e-6 and group index to 1e-5 at all ${points.length} points`, () => {
    const set = SELLMEIER_SETS[id as SellmeierId];
    assert.ok(points.length >= 5);
    for (const { lambda_um, T_C, n, ng } of points) {
      const at = `${id} at ${lambda_um} µm, ${T_C} °C`;
      assertClose(set.index(lambda_um, T_C), n, { abs: 1e-6 }, at);
      assertClose(
        set.index(lambda_um, T_C) - lambda_um * set.slope(lambda_um, T_C),
        ng,
        { abs: 1e-5 },
        `ng ${at}`,
      );
    }
  });
}

Deno.test("the analytic slope of every set is the differenced index", () => {
  const h = 1e-4;
  for (const [id, set] of Object.entries(SELLMEIER_SETS)) {
    for (const L of [0.5, 0.6328, 0.8, 1.064, 1.55, 1.69]) {
      for (const T of [20, 25, 137.5]) {
        const differenced = (8 * (set.index(L + h, T) - set.index(L - h, T)) -
          (set.index(L + 2 * h, T) - set.index(L - 2 * h, T))) / (12 * h);
        assertClose(set.slope(L, T), differenced, { rel: 1e-8, abs: 1e-10 }, `${id} at ${L} µm, ${T} °C`);
      }
    }
  }
});

/** Largest difference of two sets from 0.532 to 1.55 µm, at one temperature each. */
function spread(a: SellmeierSet, aC: number, b: SellmeierSet, bC: number): number {
  let worst = 0;
  for (let L = 0.532; L <= 1.55; L += 0.002) {
    worst = Math.max(worst, Math.abs(a.index(L, aC) - b.index(L, bC)));
  }
  return worst;
}

// Limits between independent equations, 0.532 to 1.55 µm: 7e-4 (LiNbO3 n_e), 9e-4 (KTP). For the doped crystal none is
// published: the measured spread, rounded up.
Deno.test("independent equations for the same index agree within the spread of the data", () => {
  const s = SELLMEIER_SETS;
  assert.ok(spread(s.jundt_e, 25, s.el_e, 25) < 7e-4);
  assert.ok(spread(s.jundt_e, 21, s.zel_cln_e, 21) < 7e-4);
  assert.ok(spread(s.el_o, 21, s.zel_cln_o, 21) < 7e-4);
  assert.ok(spread(s.gayer5_e, 24.5, s.zel_mg_e, 21) < 1.3e-3);
  assert.ok(spread(s.gayer5_o, 24.5, s.zel_mg_o, 21) < 1e-3);
  assert.ok(spread(s.ktp_z, 25, s.kato_z, 25) < 9e-4);
  assert.ok(spread(s.ktp_y, 25, s.kato_y, 25) < 9e-4);
});

Deno.test("n_e of Jundt and of Edwards and Lawrence stay together up to 200 °C", () => {
  for (const T of [50, 100, 150, 200]) {
    assert.ok(spread(SELLMEIER_SETS.jundt_e, T, SELLMEIER_SETS.el_e, T) < 7e-4, `${T} °C`);
  }
});

Deno.test("n_o exceeds n_e everywhere in LiNbO3: the rows are not swapped", () => {
  const pairs: [SellmeierSet, SellmeierSet][] = [
    [SELLMEIER_SETS.el_o, SELLMEIER_SETS.el_e],
    [SELLMEIER_SETS.el_o, SELLMEIER_SETS.jundt_e],
    [SELLMEIER_SETS.zel_cln_o, SELLMEIER_SETS.zel_cln_e],
    [SELLMEIER_SETS.zel_mg_o, SELLMEIER_SETS.zel_mg_e],
    [SELLMEIER_SETS.gayer5_o, SELLMEIER_SETS.gayer5_e],
  ];
  for (const [o, e] of pairs) {
    for (let L = 0.5; L <= 1.7; L += 0.05) {
      for (const T of [20, 100, 200]) assert.ok(o.index(L, T) > e.index(L, T), `${L} µm, ${T} °C`);
    }
  }
});

Deno.test("the temperature function of Jundt is a product: the quotient gives another index", () => {
  // Trap of a transcription: with (T − 24.5)/(T + 570.82) n_e(1.55 µm, 100 °C) is 2.137861 instead of 2.141045.
  const n = SELLMEIER_SETS.jundt_e.index(1.55, 100);
  assertClose(n, 2.141045, { abs: 1e-6 });
  assert.ok(Math.abs(n - 2.137861) > 3e-3);
});

Deno.test("the infrared term of Kato and Takaoka is negative: the other sign gives another index", () => {
  const n = SELLMEIER_SETS.kato_z.index(1.55, 20);
  const x = 1.55 * 1.55;
  const wrong = Math.sqrt(n * n - 2 * 110.80672 / (x - 86.12171));
  assertClose(n, 1.815773, { abs: 1e-6 });
  assert.ok(wrong - n > 0.1);
});

// Emanueli & Arie (2003) at 25 °C and Kato & Takaoka (2002), recomputed.
Deno.test("thermo-optic coefficients of KTP are the published ones", () => {
  const perKelvin = (set: SellmeierSet, L: number) =>
    1e6 * (set.index(L, 25.01) - set.index(L, 24.99)) / 0.02;
  const cases: [SellmeierSet, [number, number, number]][] = [
    [SELLMEIER_SETS.ktp_y, [14.312, 9.060, 8.546]],
    [SELLMEIER_SETS.ktp_z, [24.188, 14.774, 13.732]],
    [SELLMEIER_SETS.kato_x, [9.936, 6.234, 5.290]],
    [SELLMEIER_SETS.kato_y, [14.020, 8.338, 7.595]],
    [SELLMEIER_SETS.kato_z, [25.044, 14.418, 12.079]],
  ];
  for (const [set, values] of cases) {
    [0.532, 1.064, 1.55].forEach((L, k) =>
      assertClose(perKelvin(set, L), values[k]!, { abs: 1e-3 }, `${set.source} ${set.axis} at ${L} µm`)
    );
  }
});

Deno.test("the absolute thermo-optic coefficient of Gayer is not that of undoped LiNbO3", () => {
  const perKelvin = (set: SellmeierSet) => (set.index(1.064, 30.5) - set.index(1.064, 29.5));
  assertClose(perKelvin(SELLMEIER_SETS.jundt_e), 4.1e-5, { abs: 1e-6 }, "Jundt");
  assertClose(perKelvin(SELLMEIER_SETS.el_e), 3.9e-5, { abs: 1e-6 }, "Edwards and Lawrence");
  assertClose(perKelvin(SELLMEIER_SETS.gayer5_e), 2.7e-4, { abs: 1e-5 }, "Gayer");
});
