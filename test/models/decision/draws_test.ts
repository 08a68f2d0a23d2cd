import assert from "node:assert/strict";
import fc from "fast-check";
import { drawTrait, nestedStrata } from "../../../models/decision/draws.ts";
import { randomFrom } from "../../../shared/random.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import { assertClose } from "../../assert_close.ts";

const inEachStratum = (p: Float64Array, n: number) =>
  assert.deepEqual(
    [...p].map((x) => Math.floor(x * n)).sort((a, b) => a - b),
    Array.from({ length: n }, (_, i) => i),
  );

Deno.test("nestedStrata() fills every stratum once, and the first draws fill every coarse stratum once", () => {
  fc.assert(
    fc.property(
      fc.integer(),
      fc.constantFrom(1, 2, 8, 16),
      fc.constantFrom(1, 3, 16),
      (seed, nested, times) => {
        const n = nested * times;
        const p = nestedStrata(n, nested, randomFrom(seed));
        inEachStratum(p, n);
        inEachStratum(p.subarray(0, nested), nested);
      },
    ),
  );
});

Deno.test("nestedStrata() refuses a nested sample that does not divide the whole", () => {
  assert.throws(() => nestedStrata(10, 3, randomFrom(1)), RangeError);
});

Deno.test("drawTrait() has the mean and spread of its trait", () => {
  const x = drawTrait({ value: 3, u: 0.5 }, {}, nestedStrata(4096, 16, randomFrom("a")));
  assertClose(mean(x), 3, { abs: 1e-4 });
  assertClose(standardDeviation(x), 0.5, { rel: 2e-3 });
});

Deno.test("drawTrait() truncates at its bounds: mean of a normal cut at zero", () => {
  // E[x | x > 0] = μ + σ φ(μ/σ)/Φ(μ/σ): N. L. Johnson & S. Kotz, Continuous Univariate Distributions (from memory);
  // at μ = σ: 1 + 0.2419707245/0.8413447461.
  const x = drawTrait({ value: 1, u: 1 }, { low: 0 }, nestedStrata(4096, 16, randomFrom("b")));
  assert.ok(x.every((v) => v >= 0));
  assertClose(mean(x), 1 + 0.2419707245 / 0.8413447461, { rel: 2e-3 });
});

Deno.test("drawTrait() stays finite and inside its bounds wherever the reading lies", () => {
  fc.assert(
    fc.property(
      fc.double({ min: -50, max: 50, noNaN: true }),
      fc.double({ min: 0, max: 3, noNaN: true }),
      (value, u) => {
        const x = drawTrait({ value, u }, { low: 0, high: 1 }, nestedStrata(32, 16, randomFrom(3)));
        for (const v of x) assert.ok(v >= 0 && v <= 1, `${v} from ${value} ± ${u}`);
      },
    ),
  );
});

Deno.test("drawTrait() keeps to its bound when the reading lies many u beyond it", () => {
  // A normal cut in its far tail is exponential there: mean excess u²/distance (E. B. Wilson & M. M. Hilferty; from memory).
  for (const distance of [8.5, 20, 45]) {
    const x = drawTrait({ value: -distance, u: 1 }, { low: 0 }, nestedStrata(4096, 16, randomFrom(distance)));
    assert.ok(x.every((v) => Number.isFinite(v) && v >= 0), `${distance} u below the bound`);
    if (distance < 37) assertClose(mean(x), 1 / distance, { rel: 0.03 }, `mean excess at ${distance} u`);
    const mirrored = drawTrait(
      { value: 1 + distance, u: 1 },
      { high: 1 },
      nestedStrata(4096, 16, randomFrom(distance)),
    );
    assert.ok(mirrored.every((v) => Number.isFinite(v) && v <= 1), `${distance} u above the bound`);
  }
});
