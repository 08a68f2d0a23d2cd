import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import {
  armsSeparable,
  armWindow,
  filterBand,
  transmission,
  unfilteredHalfWidth,
} from "../../../models/pairs/mod.ts";
import { armAxis, commonAxis } from "../../../models/pairs/axis.ts";
import { NEEDS_FILTERS } from "../../../models/pairs/window.ts";
import { lambdaOf, omegaOf } from "../../../shared/units.ts";

const centre = omegaOf(1582e-9);
const flat = { shape: "flat-top", fwhm: 12e-9, peak: 0.97, centre: 1582e-9 } as const;
const gauss = { shape: "gaussian", fwhm: 3e-9, peak: 0.8, centre: 1580e-9 } as const;

Deno.test("transmission() is the peak inside a flat top, half of it at a Gaussian's half maximum", () => {
  assert.equal(transmission(flat, omegaOf(1587.9e-9)), 0.97);
  assert.equal(transmission(flat, omegaOf(1588.1e-9)), 0);
  assertClose(transmission(gauss, omegaOf(1581.5e-9)), 0.4, { rel: 1e-9 });
  assert.equal(transmission(gauss, omegaOf(1580e-9)), 0.8);
});

Deno.test("filterBand() is a flat top's band, or ±2 FWHM of a Gaussian, edge to edge in wavelength", () => {
  const [a, b] = filterBand(flat);
  assertClose(lambdaOf(a), 1588e-9, { rel: 1e-14 });
  assertClose(lambdaOf(b), 1576e-9, { rel: 1e-14 });
  const [c, d] = filterBand(gauss);
  assertClose(lambdaOf(c) - lambdaOf(d), 12e-9, { rel: 1e-9 });
  assert.throws(() => filterBand({ ...flat, fwhm: 0 }), RangeError);
  assert.throws(() => filterBand({ ...flat, peak: 1.2 }), /peak 1.2/);
});

Deno.test("an unfiltered arm reaches 10 zeros or 3 pump widths, whichever is more", () => {
  assertClose(unfilteredHalfWidth(0.01, -3e-10, 1e12), 10 * 2 * Math.PI / 3e-12, { rel: 1e-14 });
  assert.equal(unfilteredHalfWidth(0.01, 3e-10, 1e13), 3e13);
  assert.equal(unfilteredHalfWidth(0.01, 0, 1e13), Infinity);
});

Deno.test("a window beyond ±5 % of ω, or beyond the index model, is cut and needs filters", () => {
  const fine = armWindow({ centre }, 0.04 * centre);
  assert.equal(fine.cut, null);
  assertClose(fine.stated[1] - fine.stated[0], 0.08 * centre, { rel: 1e-12 });
  const wide = armWindow({ centre }, Infinity);
  assert.equal(wide.cut, NEEDS_FILTERS);
  assertClose(wide.stated[0], 0.95 * centre, { rel: 1e-12 });
  const edge = armWindow({ centre, limits: [0.99 * centre, Infinity] }, 0.02 * centre);
  assert.deepEqual([edge.stated[0], edge.cut], [0.99 * centre, NEEDS_FILTERS]);
  assert.throws(() => armWindow({ centre, limits: [1.1 * centre, Infinity] }, 1e12), /centre/);
});

Deno.test("a filtered arm states its filter's band, and keeps the open window for its herald", () => {
  const w = armWindow({ centre, filter: flat }, 0.02 * centre);
  assert.deepEqual([w.stated, w.cut, w.filtered], [filterBand(flat), null, true]);
  assert.ok(w.open[0] < w.stated[0] && w.open[1] > w.stated[1]);
  const narrow = armWindow({ centre, filter: flat }, 1e9);
  assert.deepEqual(narrow.open, narrow.stated);
  assert.throws(
    () => armWindow({ centre, filter: flat, limits: [centre * 0.9999, 2 * centre] }, 1e12),
    /band/,
  );
});

Deno.test("arms are told apart by polarisation, or by windows that do not overlap", () => {
  assert.ok(armsSeparable(false, [1, 3], [1, 3]));
  assert.ok(!armsSeparable(true, [1, 3], [2, 4]));
  assert.ok(armsSeparable(true, [1, 2], [2, 3]) && armsSeparable(true, [5, 6], [2, 3]));
});

Deno.test("an axis has its points on the midpoints of equal steps, and its cells fill its windows exactly", () => {
  const w = armWindow({ centre, filter: gauss }, 0.02 * centre);
  const axis = armAxis(w, gauss, { points: 64 });
  assert.equal(axis.segments.length, 3);
  assertClose(axis.weight.reduce((a, b) => a + b, 0), w.open[1] - w.open[0], { rel: 1e-12 });
  const band = axis.segments[1]!;
  assert.deepEqual([band.from, band.to, band.count, band.stated], [...w.stated, 64, true]);
  assert.equal(axis.power[band.first - 1], 0);
  for (let k = 0; k < 64; k++) {
    const omega = axis.omega[band.first + k]!;
    assertClose(omega, band.from + (k + 0.5) * (band.to - band.from) / 64, { rel: 1e-14 });
    assert.equal(axis.power[band.first + k], transmission(gauss, omega));
  }
  const open = armAxis(armWindow({ centre }, 1e12), undefined, { points: 10, longestStep: 1e11 });
  assert.deepEqual([open.omega.length, open.power[3]], [20, 1]);
});

Deno.test("a common axis spans both windows with one step, dark outside its own", () => {
  const w = armWindow({ centre, filter: flat }, 1e12);
  const axis = commonAxis([w.stated[0] - 1e12, w.stated[1]], 50, w, flat);
  assertClose(axis.weight[0]!, axis.weight[49]!, { rel: 1e-12 });
  assert.deepEqual([axis.power[0], axis.power[49]], [0, 0.97]);
});
