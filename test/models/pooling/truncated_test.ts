import assert from "node:assert/strict";
import fc from "fast-check";
import { truncated } from "../../../models/pooling/mod.ts";
import { assertClose } from "../../assert_close.ts";

/** Moments by quadrature over the density, far enough for what is left of the normal. */
function byQuadrature(value: number, u: number, low: number, high: number): { mean: number; sd: number } {
  const [a, b] = [Math.max(low, value - 12 * u), Math.min(high, Math.max(value, low) + 12 * u)];
  const n = 200_000;
  let [s0, s1, s2] = [0, 0, 0];
  const peak = Math.min(b, Math.max(a, value));
  for (let i = 0; i <= n; i++) {
    const x = a + (b - a) * i / n;
    const z = (x - value) / u;
    const z0 = (peak - value) / u;
    const w = (i === 0 || i === n ? 0.5 : 1) * Math.exp(-0.5 * (z * z - z0 * z0));
    s0 += w;
    s1 += w * (x - peak);
    s2 += w * (x - peak) ** 2;
  }
  return { mean: peak + s1 / s0, sd: Math.sqrt(s2 / s0 - (s1 / s0) ** 2) };
}

Deno.test("truncated() agrees with quadrature over the cut normal", () => {
  for (
    const [value, u, low, high] of [
      [0.1, 0.05, 0, Infinity],
      [-0.02, 0.03, 0, Infinity],
      [-0.2, 0.03, 0, Infinity],
      [0.5, 0.4, 0, 1],
      [1.3, 0.2, 0, 1],
      [0.5, 0.01, 0, 1],
    ] as const
  ) {
    const t = truncated({ value, u }, { low, high });
    const q = byQuadrature(value, u, low, high);
    assertClose(t.value, q.mean, { rel: 1e-6 }, `mean of ${value} ± ${u}`);
    assertClose(t.u, q.sd, { rel: 1e-5 }, `sd of ${value} ± ${u}`);
  }
});

Deno.test("truncated() goes over into its far-tail form without a step", () => {
  for (const bounds of [{ low: 0 }, { low: 0, high: 1 }]) {
    const [near, far] = [
      truncated({ value: -29.99, u: 1 }, bounds),
      truncated({ value: -30.01, u: 1 }, bounds),
    ];
    assertClose(far.value, near.value, { rel: 4e-3 });
    assertClose(far.u, near.u, { rel: 4e-3 });
    assertClose(far.hi, near.hi, { rel: 4e-3 });
  }
});

Deno.test("truncated() is the half-normal for a value on the bound", () => {
  // Mean √(2/π)·u, variance (1 − 2/π)·u².
  const t = truncated({ value: 0, u: 2 }, { low: 0 });
  assertClose(t.value, 2 * Math.sqrt(2 / Math.PI), { rel: 1e-12 });
  assertClose(t.u, 2 * Math.sqrt(1 - 2 / Math.PI), { rel: 1e-12 });
  assertClose(t.hi, 2 * 2.2414027276, { rel: 1e-8 }); // normal quantile at 0.9875
});

Deno.test("truncated() stays inside its bounds with ordered quantiles, whatever the value", () => {
  fc.assert(
    fc.property(
      fc.double({ min: -50, max: 50, noNaN: true }),
      fc.double({ min: 0.01, max: 10, noNaN: true }),
      fc.constantFrom<{ low?: number; high?: number }>({ low: 0 }, { high: 1 }, { low: 0, high: 1 }, {}),
      (value, u, bounds) => {
        const t = truncated({ value, u }, bounds);
        const [low, high] = [bounds.low ?? -Infinity, bounds.high ?? Infinity];
        assert.ok(low <= t.lo && t.lo <= t.hi && t.hi <= high, JSON.stringify(t));
        assert.ok(t.value >= low && t.value <= high && t.u >= 0 && t.u <= u * (1 + 1e-9), JSON.stringify(t));
      },
    ),
  );
  assert.throws(() => truncated({ value: 0, u: 1 }, { low: 1, high: 1 }), RangeError);
});
