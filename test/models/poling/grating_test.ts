import { deepStrictEqual, strictEqual, throws } from "node:assert/strict";
import fc from "fast-check";
import { domainSignAt, domainSigns, uniformGrating, unpoledGaps } from "../../../models/poling/mod.ts";
import { gratingSpectrumDirect } from "../../../models/poling/mod.ts";
import { assertClose } from "../../assert_close.ts";

Deno.test("uniformGrating() centres an inverted domain in every period", () => {
  const grating = uniformGrating({ start: 1, length: 3, period: 1, duty: 0.4 });
  [1.3, 1.7, 2.3, 2.7, 3.3, 3.7].forEach((z, j) => assertClose(grating.walls[j]!, z, { rel: 1e-14 }));
  strictEqual(grating.walls.length, 6);
  strictEqual(grating.end, 4);
});

Deno.test("uniformGrating() cuts the last inverted domain at the section's end", () => {
  strictEqual(uniformGrating({ start: 0, length: 3.2, period: 1 }).walls.length, 6);
  strictEqual(uniformGrating({ start: 0, length: 3.3, period: 1 }).walls.length, 8);
  strictEqual(uniformGrating({ start: 0, length: 3.3, period: 1 }).walls[7], 3.3);
  const cut = uniformGrating({ start: 0, length: 3.8, period: 1, duty: 0.9 });
  strictEqual(cut.walls[7], 3.8);
});

Deno.test("uniformGrating() is as strong as its section is long, whatever fraction of a period it ends with", () => {
  for (let n = 0; n <= 20; n++) {
    const length = 100 + n / 20;
    const grating = uniformGrating({ start: 0, length, period: 1 });
    const { re, im } = gratingSpectrumDirect(grating, { first: 2 * Math.PI, step: 1, count: 1 });
    // 2/π of an ideal first order: the rest of a period leaves at most a tenth of one beside it.
    assertClose(Math.hypot(re[0]!, im[0]!), 2 / Math.PI, { rel: 1.5e-3 }, `${length} periods`);
  }
});

Deno.test("uniformGrating() has the number of periods that the mask has, whatever the rounding", () => {
  fc.assert(
    fc.property(
      fc.integer({ min: 1, max: 5000 }),
      fc.double({ min: 4e-6, max: 5e-5, noNaN: true }),
      (n, period) => {
        strictEqual(uniformGrating({ start: 1e-3, length: n * period, period }).walls.length, 2 * n);
      },
    ),
    { seed: 1 },
  );
});

Deno.test("domainSigns() alternates, and domainSignAt() is +1 outside the section", () => {
  const grating = { walls: Float64Array.of(2, 3, 5), start: 1, end: 6, firstSign: -1 as const };
  deepStrictEqual([...domainSigns(grating)], [-1, 1, -1, 1]);
  deepStrictEqual([0.5, 1, 1.9, 2, 2.5, 3, 5, 6, 6.1].map((z) => domainSignAt(grating, z)), [
    1,
    -1,
    -1,
    1,
    1,
    -1,
    1,
    1,
    1,
  ]);
});

Deno.test("unpoledGaps() lists stretches over three periods, those at the section's ends too", () => {
  const walls = Float64Array.of(3.5, 4, 4.5, 7.5, 8, 11.001);
  const grating = { walls, start: 0, end: 13, firstSign: 1 as const };
  deepStrictEqual(unpoledGaps(grating, 1), [{ from: 0, to: 3.5 }, { from: 8, to: 11.001 }]);
  deepStrictEqual(unpoledGaps({ ...grating, walls: new Float64Array(0) }, 1), [{ from: 0, to: 13 }]);
  deepStrictEqual(unpoledGaps(uniformGrating({ start: 0, length: 10, period: 1 }), 1), []);
});

Deno.test("impossible layouts are refused", () => {
  throws(() => uniformGrating({ start: 0, length: 0, period: 1 }), RangeError);
  throws(() => uniformGrating({ start: 0, length: 1, period: NaN }), RangeError);
  throws(() => uniformGrating({ start: 0, length: 1, period: 0.1, duty: 1 }), RangeError);
  throws(() => unpoledGaps(uniformGrating({ start: 0, length: 1, period: 0.1 }), 0), RangeError);
});
