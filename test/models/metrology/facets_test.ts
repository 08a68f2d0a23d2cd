import { deepStrictEqual, ok, strictEqual, throws } from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import {
  type CoatedReflectivity,
  coatedReflectivity,
  isRefused,
  nearestReading,
  scaleModeSize,
} from "../../../models/metrology/mod.ts";
import { nm } from "../../../shared/units.ts";

const at = (lambdaNm: number, reflectivity: number, u = 0.002) => ({ lambda: nm(lambdaNm), reflectivity, u });
function value(result: CoatedReflectivity | { refused: string }): CoatedReflectivity {
  if (isRefused(result)) throw new Error(result.refused);
  return result as CoatedReflectivity;
}

Deno.test("a coating is linear between readings at most 25 nm apart", () => {
  const readings = [at(1575, 0.02), at(1550, 0.01), at(1600.1, 0.03)];
  const between = value(coatedReflectivity(readings, nm(1555)));
  assertClose(between.value, 0.012, { rel: 1e-9 });
  assertClose(between.u, 0.002 * Math.hypot(0.8, 0.2), { rel: 1e-9 });
  deepStrictEqual(between.used, [0, 1]);
  const gap = coatedReflectivity(readings, nm(1580));
  ok(isRefused(gap) && gap.refused.includes("1575 and 1600.1 nm"));
  // on a reading the gap beside it does not matter
  assertClose(value(coatedReflectivity(readings, nm(1600.1))).value, 0.03, { abs: 0 });
});

Deno.test("a coating is believed to 5 nm beyond the outermost reading and no farther", () => {
  const readings = [at(1550, 0.01), at(1570, 0.02)];
  assertClose(value(coatedReflectivity(readings, nm(1574))).value, 0.022, { rel: 1e-9 });
  assertClose(value(coatedReflectivity(readings, nm(1575))).value, 0.0225, { rel: 1e-9 });
  assertClose(value(coatedReflectivity(readings, nm(1545))).value, 0.0075, { rel: 1e-9 });
  ok(value(coatedReflectivity(readings, nm(1545))).u > 0.002, "u grows beyond the readings");
  for (const outside of [1544.99, 1575.01, 791]) {
    const result = coatedReflectivity(readings, nm(outside));
    ok(isRefused(result) && result.refused.includes("over 5 nm away"), String(outside));
  }
  // a lone reading is held, also on both sides of a gap too wide for a line
  assertClose(value(coatedReflectivity([at(1550, 0.01)], nm(1553))).value, 0.01, { abs: 0 });
  assertClose(value(coatedReflectivity([at(1500, 0.5), at(1550, 0.01)], nm(1553))).value, 0.01, { abs: 0 });
  // never below nothing
  strictEqual(value(coatedReflectivity([at(1550, 0.0001), at(1552, 0.01)], nm(1548))).value, 0);
  const empty = coatedReflectivity([], nm(1550));
  ok(isRefused(empty) && empty.refused.includes("no reflectivity was read"));
});

Deno.test("repeats at one wavelength are averaged by weight, and all count as used", () => {
  const readings = [at(1550, 0.012, 0.002), at(1560, 0.02), at(1550, 0.009, 0.001)];
  const mean = value(coatedReflectivity(readings, nm(1550)));
  assertClose(mean.value, (0.012 / 4 + 0.009) / 1.25, { rel: 1e-12 });
  assertClose(mean.u, 0.001 / Math.sqrt(1.25), { rel: 1e-12 });
  deepStrictEqual(mean.used, [0, 2]);
  deepStrictEqual(value(coatedReflectivity(readings, nm(1551))).used, [0, 1, 2]);
  throws(() => coatedReflectivity([at(1550, 1.2)], nm(1550)), RangeError);
  throws(() => coatedReflectivity([at(1550, 0.2, NaN)], nm(1550)), RangeError);
  throws(() => coatedReflectivity(readings, -1), RangeError);
});

Deno.test("nearestReading() takes the nearest within five per cent, with its repeats and distance", () => {
  const readings = [1582, 791, 1550, 1550, 1480].map((x) => ({ lambda: nm(x) }));
  const near = nearestReading(readings, nm(1560));
  strictEqual(near?.index, 2);
  deepStrictEqual(near.repeats, [2, 3]);
  assertClose(near.distance, -10 / 1560, { rel: 1e-9 });
  strictEqual(nearestReading(readings, nm(1000)), null);
  strictEqual(nearestReading([], nm(1000)), null);
  // exactly on the limit, both ways
  strictEqual(nearestReading([{ lambda: nm(1050) }], nm(1000))?.index, 0);
  strictEqual(nearestReading([{ lambda: nm(950) }], nm(1000))?.index, 0);
  strictEqual(nearestReading([{ lambda: nm(1050.001) }], nm(1000)), null);
  // equally near: the shorter, whatever the order
  strictEqual(nearestReading([{ lambda: nm(1010) }, { lambda: nm(990) }], nm(1000))?.index, 1);
  strictEqual(nearestReading([{ lambda: nm(990) }, { lambda: nm(1010) }], nm(1000))?.index, 0);
  throws(() => nearestReading([{ lambda: NaN }], nm(1000)), RangeError);
});

Deno.test("a mode's size is carried in proportion to the wavelength", () => {
  const size = scaleModeSize({ value: 8e-6, u: 0.2e-6 }, nm(1550), nm(1581));
  assertClose(size.value, 8.16e-6, { rel: 1e-9 });
  assertClose(size.u / size.value, 0.2 / 8, { rel: 1e-12 });
});
