import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import { carContinuous, carPulsed } from "../../../models/pairs/mod.ts";

const dark = { signal: 100, idler: 300, window: 1e-9 };

Deno.test("carPulsed() is (n̄η_sη_i + p_sp_i)/(p_sp_i)", () => {
  // worked by hand: n̄ 0.01, η 0.5 and 0.25, darks 1e-7 and 3e-7 per window
  const ps = 0.005 + 1e-7;
  const pi = 0.0025 + 3e-7;
  assertClose(
    carPulsed(0.01, { signal: 0.5, idler: 0.25, both: 0.125 }, dark),
    (0.00125 + ps * pi) / (ps * pi),
    {
      rel: 1e-12,
    },
  );
});

Deno.test("without darks CAR is 1 + 1/n̄, and darks spoil it when pairs are few", () => {
  const seen = { signal: 0.3, idler: 0.4, both: 0.12 };
  const clean = { signal: 0, idler: 0, window: 1e-9 };
  for (const n of [1e-4, 1e-2]) assertClose(carPulsed(n, seen, clean), 1 + 1 / n, { rel: 1e-12 });
  assert.ok(carPulsed(1e-9, seen, dark) < carPulsed(1e-6, seen, dark));
});

Deno.test("carContinuous() takes rates and the window: the published accidentals of 8 per second", () => {
  // fixtures/check-values/pairs.json, klyshko: 100 k/s and 80 k/s in 1 ns give 8 accidentals per second
  const clean = { signal: 0, idler: 0, window: 1e-9 };
  const seen = { signal: 0.25, idler: 0.2, both: 0.05 };
  assertClose(carContinuous(400_000, seen, clean), (20_000 + 8) / 8, { rel: 1e-12 });
  assertClose(carContinuous(400_000, seen, dark), 1 + 20_000 / (100_100 * 80_300 * 1e-9), { rel: 1e-12 });
});

Deno.test("impossible efficiencies and rates are refused", () => {
  assert.throws(() => carPulsed(0.01, { signal: 0.1, idler: 0.2, both: 0.15 }, dark), /0.15/);
  assert.throws(() => carPulsed(-1, { signal: 0.1, idler: 0.2, both: 0.02 }, dark), /pairs = -1/);
  assert.throws(() => carContinuous(NaN, { signal: 0.1, idler: 0.2, both: 0.02 }, dark), RangeError);
});
