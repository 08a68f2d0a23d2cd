import { deepStrictEqual, ok, strictEqual, throws } from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  effectiveLength,
  fitTuningScan,
  isRefused,
  type ScanPoint,
  type TuningFit,
} from "../../../models/metrology/mod.ts";
import { sincSquared } from "../../../models/metrology/_sinc.ts";
import { randomFrom } from "../../../shared/random.ts";

const HALF = 1.391557378251510; // sinc²(HALF) = ½ (recomputed, check-values C1: ΔβL 5.566229513)
const sinc2 = (v: number) => v === 0 ? 1 : (Math.sin(v) / v) ** 2;

interface Curve {
  readonly centre: number;
  readonly fwhm: number;
  readonly scale: number;
  readonly offset: number;
}
const CURVE: Curve = { centre: 1550.37, fwhm: 0.42, scale: 3.1e-5, offset: 2e-6 };
const power = (c: Curve, x: number) => c.offset + c.scale * sinc2(2 * HALF * (x - c.centre) / c.fwhm);
const axis = (from: number, to: number, count: number) =>
  Array.from({ length: count }, (_, k) => from + (to - from) * k / (count - 1));
const scan = (c: Curve, xs: readonly number[], noise: () => number = () => 0): ScanPoint[] =>
  xs.map((x) => ({ x, power: power(c, x) + noise() }));
function fitted(result: ReturnType<typeof fitTuningScan>): TuningFit {
  if (isRefused(result)) throw new Error(result.refused);
  return result;
}
const reason = (r: ReturnType<typeof fitTuningScan>) => isRefused(r) ? r.refused : "fitted";

Deno.test("sincSquared() joins its series to its quotient, and its slope is its derivative", () => {
  for (const v of [1e-9, 9.99e-4, 1.001e-3, 0.7, HALF, Math.PI, 9]) {
    const [value, slope] = sincSquared(v);
    assertClose(value, sinc2(v), { abs: 1e-15, rel: 1e-13 });
    const h = 1e-5;
    assertClose(slope, (sincSquared(v + h)[0] - sincSquared(v - h)[0]) / (2 * h), { abs: 1e-9 });
  }
  assertClose(sincSquared(HALF)[0], 0.5, { rel: 1e-14 });
});

Deno.test("a noiseless tuning curve comes back, anywhere in the scan, at any scale", () => {
  fc.assert(
    fc.property(
      fc.double({ min: -0.7, max: 0.7, noNaN: true }),
      fc.double({ min: 0.12, max: 0.55, noNaN: true }),
      fc.constantFrom(1e-9, 1, 1e9),
      fc.constantFrom(0, 1550, -40),
      fc.double({ min: -3, max: 3, noNaN: true }),
      (centre, fwhm, scale, at, offset) => {
        const c = { centre: at + centre, fwhm, scale, offset: offset * scale };
        const fit = fitted(fitTuningScan(scan(c, axis(at - 1, at + 1, 101))));
        assertClose(fit.centre.value, c.centre, { abs: 1e-8 });
        assertClose(fit.fwhm.value, fwhm, { rel: 1e-7 });
        assertClose(fit.scale.value, scale, { rel: 1e-7 });
        assertClose(fit.offset.value, c.offset, { abs: 1e-7 * scale });
      },
    ),
    { numRuns: 60, seed: 4 },
  );
});

Deno.test("the order of the points, repeats and a descending axis change nothing", () => {
  const random = randomFrom("order");
  const noisy = scan(CURVE, axis(1549.5, 1551.3, 80), () => 4e-7 * random.normal());
  const up = fitted(fitTuningScan(noisy));
  const down = fitted(fitTuningScan([...noisy].reverse()));
  assertClose(down.centre.value, up.centre.value, { rel: 1e-12 });
  assertClose(down.fwhm.u, up.fwhm.u, { rel: 1e-6 });
  const twice = fitted(fitTuningScan([...noisy, ...noisy]));
  assertClose(twice.centre.value, up.centre.value, { rel: 1e-10 });
});

Deno.test("points that are not finite are left out and named", () => {
  const points = scan(CURVE, axis(1549.5, 1551.3, 60));
  points[7] = { x: points[7]!.x, power: NaN };
  points[30] = { x: Infinity, power: 1 };
  const fit = fitted(fitTuningScan(points));
  deepStrictEqual(fit.ignored, [7, 30]);
  strictEqual(fit.used.length, 58);
  assertClose(fit.centre.value, CURVE.centre, { abs: 1e-8 });
});

Deno.test("uncertainties cover: pulls of simulated scans have unit spread", () => {
  const random = randomFrom("scan pulls");
  const runs = 200;
  for (const u of [0, 1.5e-6]) {
    let [centre, width, scale, shaped] = [0, 0, 0, 0];
    for (let n = 0; n < runs; n++) {
      const points = scan(CURVE, axis(1549.3, 1551.5, 70), () => 1.5e-6 * random.normal());
      const fit = fitted(fitTuningScan(u === 0 ? points : points.map((p) => ({ ...p, u }))));
      centre += ((fit.centre.value - CURVE.centre) / fit.centre.u) ** 2;
      width += ((fit.fwhm.value - CURVE.fwhm) / fit.fwhm.u) ** 2;
      scale += ((fit.scale.value - CURVE.scale) / fit.scale.u) ** 2;
      if (fit.residual.pShape < 0.01) shaped++;
      strictEqual(fit.residual.chiSquared === null, u === 0);
    }
    // widening by chance correlation makes the u a little generous: mean square 0.75 to 1 at 4 standard errors
    const spread = 4 * Math.sqrt(2 / runs);
    for (const sum of [centre, width, scale]) {
      ok(sum / runs > 0.85 - spread && sum / runs < 1 + spread, `mean square pull ${sum / runs}`);
    }
    ok(shaped <= 7, `${shaped} of ${runs} good shapes called wrong`);
  }
});

Deno.test("u too small for the scatter is widened to it", () => {
  const random = randomFrom("wide");
  const points = scan(CURVE, axis(1549.3, 1551.5, 70), () => 1.5e-6 * random.normal());
  const honest = fitted(fitTuningScan(points));
  const proud = fitted(fitTuningScan(points.map((p) => ({ ...p, u: 1e-8 }))));
  assertClose(proud.centre.u, honest.centre.u, { rel: 1e-6 });
  ok(proud.residual.pValue! < 1e-9);
});

Deno.test("a shape that is not sinc² shows in the residual test and widens the uncertainty", () => {
  const xs = axis(1548.9, 1551.9, 151);
  const random = randomFrom("shape");
  // a second, weaker peak beside the first, as a guide with a step in its width gives
  const points = xs.map((x) => ({
    x,
    power: power(CURVE, x) + 0.3 * power({ ...CURVE, centre: CURVE.centre + 0.6 }, x) +
      2e-7 * random.normal(),
  }));
  const fit = fitted(fitTuningScan(points));
  ok(fit.residual.lag1 > 0.6 && fit.residual.pShape < 1e-6, `lag ${fit.residual.lag1}`);
  ok(fit.residual.relative > 0.02);
  ok(fit.asymmetry!.value > 3 * fit.asymmetry!.u, `asymmetry ${fit.asymmetry!.value}, u ${fit.asymmetry!.u}`);
});

Deno.test("asymmetry is zero for a symmetric curve and takes the sign of the heavier side", () => {
  const xs = axis(1548.9, 1551.9, 301);
  const plain = fitted(fitTuningScan(scan(CURVE, xs)));
  assertClose(plain.asymmetry!.value, 0, { abs: 2e-3 }); // points do not sit alike on both sides
  for (const sign of [-1, 1]) {
    const points = xs.map((x) => ({
      x,
      power: power(CURVE, x) + 0.1 * CURVE.scale * Math.exp(-(((x - CURVE.centre - sign * 0.7) / 0.1) ** 2)),
    }));
    const value = fitted(fitTuningScan(points)).asymmetry!.value;
    // the extra area √π·0.1·0.1 over the main lobe's 2·Si(2π)/(2·HALF)·FWHM = 0.428
    assertClose(value, sign * 0.1 * 0.1 * Math.sqrt(Math.PI) / 0.428, { rel: 0.2 });
  }
  strictEqual(fitted(fitTuningScan(scan(CURVE, axis(1550, 1550.8, 60)))).asymmetry, null);
});

Deno.test("scans without an answer are refused with the reason", () => {
  const xs = axis(1549.5, 1551.3, 60);
  ok(reason(fitTuningScan([])).includes("0 different scan positions"));
  ok(reason(fitTuningScan(scan(CURVE, xs.slice(0, 7)))).includes("7 different"));
  ok(
    reason(fitTuningScan(Array.from({ length: 40 }, (_, k) => ({ x: 1550, power: k })))).includes(
      "1 different",
    ),
  );
  ok(reason(fitTuningScan(xs.map((x) => ({ x, power: 2 })))).includes("the same power"));
  // two equal points are one position
  ok(
    reason(fitTuningScan([...xs.slice(0, 7), xs[6]!].map((x) => ({ x, power: x })))).includes("7 different"),
  );
  const edge = reason(fitTuningScan(scan(CURVE, axis(1550.3, 1551.5, 60))));
  ok(edge.includes("not inside the scan"), edge);
  const outside = reason(fitTuningScan(scan(CURVE, axis(1550.5, 1550.8, 60))));
  ok(outside !== "fitted", outside);
  const dip = reason(fitTuningScan(scan({ ...CURVE, scale: -CURVE.scale }, xs)));
  ok(dip !== "fitted", dip);
  throws(() => fitTuningScan(xs.map((x) => ({ x, power: x, u: -1 }))), RangeError);
});

Deno.test("plain noise, a ramp and a lone spike are no peaks", () => {
  const random = randomFrom("noise");
  const xs = axis(0, 10, 100);
  let found = 0;
  for (let n = 0; n < 60; n++) {
    if (!isRefused(fitTuningScan(xs.map((x) => ({ x, power: random.normal() }))))) found++;
  }
  ok(found === 0, `${found} peaks in 60 scans of noise`);
  ok(isRefused(fitTuningScan(xs.map((x) => ({ x, power: x + 0.01 * random.normal() })))));
  ok(isRefused(fitTuningScan(xs.map((x, k) => ({ x, power: (k === 40 ? 50 : 0) + 0.1 * random.normal() })))));
});

Deno.test("effectiveLength() is the length of the uniform grating of that width", () => {
  // L = 20 mm: FWHM in Δβ 5.566229513/L; x in nm at 3·10³ 1/m per nm, falling
  const width = 5.566229513 / 0.02 / 3000;
  const length = effectiveLength({ value: width, u: 0.01 * width }, -3000);
  assertClose(length.value, 0.02, { rel: 1e-9 });
  assertClose(length.u, 0.0002, { rel: 1e-9 });
  throws(() => effectiveLength({ value: 0, u: 0 }, 1), RangeError);
  throws(() => effectiveLength({ value: 1, u: 0 }, 0), RangeError);
});
