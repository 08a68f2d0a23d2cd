import { deepStrictEqual, ok, strictEqual, throws } from "node:assert/strict";
import {
  bandForPeak,
  type Grating,
  gratingSpectrum,
  gratingSpectrumDirect,
  mainPeaks,
  peakTemperatures,
  realiseGrating,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

const period = 20e-6;
const vector = 2 * Math.PI / period;
const length = 20e-3;
const oven: [number, number] = [20, 120];
/** One line width 2π/L is 314 1/m: with 100 1/m per °C about 3 °C. */
const ideal = uniformGrating({ start: 1e-3, length, period });

function operate(grating: Grating, u: (t: number) => number, range = oven) {
  const reach = Array.from({ length: 101 }, (_, k) => u(range[0] + (range[1] - range[0]) * k / 100));
  const band = bandForPeak(Math.min(...reach), Math.max(...reach), period, grating.end - grating.start);
  return peakTemperatures(gratingSpectrum(grating, band), u, range);
}

Deno.test("peakTemperatures() of an ideal grating is its phase matching, for either sign of Δβ", () => {
  for (const sign of [1, -1]) {
    const found = operate(ideal, (t) => sign * (vector + 100 * (t - 63.2)));
    strictEqual(found.roots.length, 1);
    // 1/Δβ in φ shifts the top by 2·(line width)²/K·O(0.1): 0.1 1/m.
    assertClose(found.roots[0]!, 63.2, { abs: 2e-3 });
    strictEqual(found.nearest, found.roots[0]);
  }
});

Deno.test("peakTemperatures() finds where |φ|² of the walls peaks, away from the design's phase matching", () => {
  // A real chip: period 0.05 % too long, noise and missing domains; checked by the direct sum on both sides of the root.
  const made = realiseGrating(
    { start: 1e-3, length, period: period * 1.0005, dutySd: 0.05, missing: 0.1 },
    randomFrom(4),
  );
  const u = (t: number) => vector + 100 * (t - 63.2);
  const { roots } = operate(made, u);
  strictEqual(roots.length, 1);
  const power = (t: number) => {
    const s = gratingSpectrumDirect(made, { first: u(t), step: 1, count: 1 });
    return s.re[0]! ** 2 + s.im[0]! ** 2;
  };
  const top = power(roots[0]!);
  for (const d of [0.02, 0.2, 1, 2]) {
    ok(power(roots[0]! - d) < top && power(roots[0]! + d) < top, `not a maximum at distance ${d}`);
  }
  assertClose(u(roots[0]!), vector / 1.0005, { abs: 20 });
});

Deno.test("peakTemperatures() returns every temperature that reaches the peak, the lowest as nearest", () => {
  // u turns at 70 °C and passes the peak at 40 and 100 °C; once from above, once from below.
  for (const bend of [1, -1]) {
    const { roots, nearest } = operate(ideal, (t) => vector + bend * 2 * ((t - 70) ** 2 - 900));
    strictEqual(roots.length, 2);
    assertClose(roots[0]!, 40, { abs: 5e-3 });
    assertClose(roots[1]!, 100, { abs: 5e-3 });
    strictEqual(nearest, roots[0]);
  }
});

Deno.test("peakTemperatures() takes a turning point high on the main peak, and no turning point on its foot", () => {
  // Main peak half width at half power: 139 1/m. u turns back 60 1/m before the top: a maximum over T.
  for (const sign of [1, -1]) {
    const near = operate(ideal, (t) => sign * (vector + 60 + 0.9 * (t - 55) ** 2));
    strictEqual(near.roots.length, 1);
    assertClose(near.roots[0]!, 55, { abs: 1e-3 });
    const far = operate(ideal, (t) => sign * (vector + 200 + 0.9 * (t - 55) ** 2));
    deepStrictEqual(far.roots, []);
    assertClose(far.nearest, 55, { abs: 1e-3 });
  }
});

Deno.test("peakTemperatures() counts a peak that u just touches once", () => {
  const s = gratingSpectrum(ideal, bandForPeak(vector - 100, vector + 9000, period, length));
  const top = mainPeaks(s)[0]!.deltaBeta;
  const { roots } = peakTemperatures(s, (t) => top + 0.9 * (t - 55) ** 2, oven);
  strictEqual(roots.length, 1);
  assertClose(roots[0]!, 55, { abs: 1e-2 });
});

Deno.test("peakTemperatures() does not take a turning point at which the power is least", () => {
  // u comes down the slope, turns back 120 1/m below the top, and leaves the range before it is up again.
  const found = operate(ideal, (t) => vector - 120 + 40 * (t - 55) ** 2, [54, 56.5]);
  deepStrictEqual(found.roots, []);
  assertClose(found.nearest, 56.5, { abs: 1e-9 });
});

Deno.test("a peak exactly at an edge of the range is no answer", () => {
  const s = gratingSpectrum(ideal, bandForPeak(vector - 10_000, vector + 10_000, period, length));
  const top = mainPeaks(s)[0]!.deltaBeta;
  for (const edge of oven) {
    const found = peakTemperatures(s, (t) => top + 90 * (t - edge), oven);
    deepStrictEqual(found.roots, []);
    strictEqual(found.nearest, edge);
  }
});

Deno.test("side lobes of a peak beyond the oven are no answer; the nearest edge is named", () => {
  for (const sign of [1, -1]) {
    // The peak lies 0.5 °C, 5 °C (on the first side lobes) and 60 °C beyond an edge.
    for (const beyond of [0.5, 5, 60]) {
      const above = operate(ideal, (t) => sign * (vector + 100 * (t - oven[1] - beyond)));
      deepStrictEqual(above.roots, []);
      strictEqual(above.nearest, 120);
      const below = operate(ideal, (t) => sign * (vector + 100 * (t - oven[0] + beyond)));
      deepStrictEqual(below.roots, []);
      strictEqual(below.nearest, 20);
    }
  }
});

Deno.test("a peak just inside the edge counts", () => {
  const found = operate(ideal, (t) => vector + 100 * (t - 119.9));
  strictEqual(found.roots.length, 1);
});

Deno.test("of two peaks the higher reachable one wins, and one with half the power still counts alone", () => {
  // A phase of π put in at 40 % of the length splits the line into two unequal peaks.
  const cut = ideal.start + 0.46 * length;
  const split: Grating = {
    ...ideal,
    walls: Float64Array.from([...ideal.walls, Math.round(cut / period) * period]).sort(),
  };
  const s = gratingSpectrum(split, bandForPeak(vector - 3000, vector + 3000, period, length));
  const peaks = mainPeaks(s);
  strictEqual(peaks.length, 2);
  const u = (t: number) => vector + 100 * (t - 70);
  const both = peakTemperatures(s, u, oven);
  strictEqual(both.roots.length, 1);
  assertClose(u(both.roots[0]!), peaks[0]!.deltaBeta, { abs: 1e-2 });
  // Only the lower one inside the range.
  const lower = peaks[1]!.deltaBeta;
  const middle = (peaks[0]!.deltaBeta + lower) / 2;
  const t = 70 + (middle - vector) / 100;
  const range: [number, number] = lower > middle ? [t, 120] : [20, t];
  const alone = peakTemperatures(s, u, range);
  strictEqual(alone.roots.length, 1);
  assertClose(u(alone.roots[0]!), lower, { abs: 1e-2 });
});

Deno.test("bandForPeak() reaches over the main peak and over the reachable range", () => {
  const band = bandForPeak(vector - 9000, vector - 8000, period, length);
  ok(band.first < vector - 9000 && band.first + band.count * band.step > vector + 6000);
  const negative = bandForPeak(-vector - 10, -vector + 10, period, length);
  ok(negative.first < -vector - 6000 && negative.first + negative.count * negative.step > -vector + 6000);
});

Deno.test("a spectrum without a peak is refused", () => {
  const s = gratingSpectrum(ideal, { first: vector - 100, step: 4, count: 20 });
  throws(() => peakTemperatures(s, (t) => vector - 90 + t / 10, oven), RangeError);
});
