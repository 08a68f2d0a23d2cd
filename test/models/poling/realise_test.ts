import { deepStrictEqual, notDeepStrictEqual, ok, strictEqual, throws } from "node:assert/strict";
import fc from "fast-check";
import {
  missingFraction,
  realiseGrating,
  uniformGrating,
  wallStatistics,
} from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

const period = 10e-6;
const at = { start: 1e-3, period };

Deno.test("realiseGrating() without errors is the uniform grating", () => {
  const made = realiseGrating({ ...at, length: 2e-3, duty: 0.45 }, randomFrom(1));
  deepStrictEqual(made, uniformGrating({ ...at, length: 2e-3, duty: 0.45 }));
});

Deno.test("realiseGrating() keeps its walls ascending inside the section for any statistics", () => {
  const window = fc.record({
    duty: fc.double({ min: 0, max: 1, noNaN: true }),
    dutySd: fc.oneof(
      fc.double({ min: 0, max: 0.2, noNaN: true }),
      fc.double({ min: 0, max: 50, noNaN: true }),
    ),
    missing: fc.double({ min: 0, max: 1, noNaN: true }),
  });
  fc.assert(
    fc.property(
      fc.integer(),
      fc.array(window, { minLength: 1, maxLength: 4 }),
      fc.double({ min: 1e-6, max: 2e-3, noNaN: true }),
      (seed, list, length) => {
        const windows = list.map((w, k) => ({ ...w, centre: k * 4e-4 }));
        const { walls, start, end, firstSign } = realiseGrating({ ...at, length, windows }, randomFrom(seed));
        strictEqual(walls.length % 2, 0);
        strictEqual(firstSign, 1);
        for (let j = 0; j < walls.length; j++) {
          ok(walls[j]! >= start && walls[j]! <= end);
          ok(j === 0 || walls[j]! > walls[j - 1]!, `wall ${j} of ${walls.length}`);
        }
      },
    ),
    { numRuns: 300, seed: 3 },
  );
});

Deno.test("realiseGrating() gives the same grating for the same seed, and another one for another", () => {
  const of = { ...at, length: 1e-3, dutySd: 0.05, missing: 0.05 };
  deepStrictEqual(realiseGrating(of, randomFrom("a")), realiseGrating(of, randomFrom("a")));
  notDeepStrictEqual(realiseGrating(of, randomFrom("a")), realiseGrating(of, randomFrom("b")));
});

Deno.test("a slightly other duty moves the walls of the same realisation, and nothing else", () => {
  const a = realiseGrating({ ...at, length: 1e-3, dutySd: 0.03, missing: 0.2 }, randomFrom(9));
  const b = realiseGrating({ ...at, length: 1e-3, dutySd: 0.03, missing: 0.2, duty: 0.51 }, randomFrom(9));
  strictEqual(a.walls.length, b.walls.length);
  a.walls.forEach((z, j) =>
    assertClose(b.walls[j]!, z + (j % 2 === 0 ? -1 : 1) * 0.005 * period, { abs: 1e-15 })
  );
});

Deno.test("realiseGrating() has the statistics of its windows: duty, spread, missing, independent walls", () => {
  const n = 20_000;
  const made = realiseGrating(
    { ...at, length: n * period, duty: 0.46, dutySd: 0.04, missing: 0.1 },
    randomFrom(2),
  );
  const found = wallStatistics(made, period);
  const used = found.used;
  // Four standard errors each.
  assertClose(found.missing, 0.1, { abs: 4 * Math.sqrt(0.09 / n) }, "missing");
  assertClose(found.dutyMean, 0.46, { abs: 4 * 0.04 / Math.sqrt(used) }, "duty");
  assertClose(found.dutySd, 0.04, { rel: 4 / Math.sqrt(2 * used) }, "spread");
  assertClose(found.centreSd, 0.04 * period / 2, { rel: 4 / Math.sqrt(2 * used) }, "centres");
  assertClose(found.period, period, { rel: 4 * 0.02 * Math.sqrt(12) / n ** 1.5 }, "period");
});

Deno.test("windows are linear in z between their centres and constant beyond", () => {
  const windows = [
    { centre: 3e-3, duty: 0.4, dutySd: 0, missing: 0 },
    { centre: 5e-3, duty: 0.6, dutySd: 0, missing: 0 },
  ];
  const { walls } = realiseGrating({ start: 0, length: 8e-3, period, windows }, randomFrom(1));
  strictEqual(walls.length, 1600);
  for (let n = 0; n < 800; n++) {
    const z = (n + 0.5) * period;
    const duty = 0.4 + 0.2 * Math.min(1, Math.max(0, (z - 3e-3) / 2e-3));
    assertClose((walls[2 * n + 1]! - walls[2 * n]!) / period, duty, { abs: 1e-9 }, `duty at ${z}`);
  }
});

Deno.test("missing domains follow their window along the guide", () => {
  const windows = [
    { centre: 0, duty: 0.5, dutySd: 0, missing: 0 },
    { centre: 100e-3, duty: 0.5, dutySd: 0, missing: 1 },
  ];
  const { walls } = realiseGrating({ start: 0, length: 100e-3, period, windows }, randomFrom(6));
  // p rises from 0 to 1: half of all are missing, a quarter of those in the first half.
  assertClose(walls.length / 2, 5000, { abs: 4 * Math.sqrt(10_000 / 6) });
  assertClose(walls.filter((z) => z < 50e-3).length / 2, 3750, { abs: 4 * Math.sqrt(5000 / 6) });
});

Deno.test("domains that touch merge, and those whose walls change places do not form", () => {
  strictEqual(realiseGrating({ ...at, length: 1e-3, duty: 0 }, randomFrom(1)).walls.length, 0);
  deepStrictEqual([...realiseGrating({ start: 0, period: 1, length: 4, duty: 1 }, randomFrom(1)).walls], [
    0,
    4,
  ]);
});

Deno.test("missingFraction() is merged/(domains + merged)", () => {
  strictEqual(missingFraction(95, 5), 0.05);
  strictEqual(missingFraction(0, 0), 0);
  throws(() => missingFraction(-1, 2), RangeError);
});

Deno.test("realiseGrating() refuses statistics that no grating can have", () => {
  const of = { ...at, length: 1e-3 };
  for (const bad of [{ duty: 1.1 }, { duty: NaN }, { dutySd: -1 }, { missing: 2 }, { windows: [] }]) {
    throws(() => realiseGrating({ ...of, ...bad }, randomFrom(1)), RangeError);
  }
  const w = { centre: 1, duty: 0.5, dutySd: 0, missing: 0 };
  throws(() => realiseGrating({ ...of, windows: [w, w] }, randomFrom(1)), RangeError);
});
