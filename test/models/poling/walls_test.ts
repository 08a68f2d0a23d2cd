import { deepStrictEqual, match, ok, strictEqual, throws } from "node:assert/strict";
import {
  gratingFromWalls,
  uniformGrating,
  wallsComplete,
  wallStatistics,
} from "../../../models/poling/mod.ts";
import { assertClose } from "../../assert_close.ts";

const period = 20e-6;
const section = { poledFrom: 1e-3, poledLength: 4e-3, period, guideLength: 6e-3 };
const walls = uniformGrating({ start: 1e-3, length: 4e-3, period }).walls;

Deno.test("wallsComplete() accepts a list that reaches within a period of both ends", () => {
  deepStrictEqual(wallsComplete(walls, section), { complete: true, remarks: [] });
  // The first domain missing: the first wall is 1.25 periods behind the start.
  strictEqual(wallsComplete(walls.slice(2), section).complete, false);
  strictEqual(wallsComplete(walls.slice(0, -2), section).complete, false);
  strictEqual(wallsComplete(walls.slice(1, -1), section).complete, true);
});

Deno.test("wallsComplete() gives the reason", () => {
  match(wallsComplete([], section).reason!, /no walls/);
  match(wallsComplete(walls.slice(50), section).reason!, /first wall at 1\.\d+ mm/);
  match(wallsComplete(walls.slice(0, 300), section).reason!, /last wall at/);
  match(wallsComplete([...walls.slice(0, 5), walls[4]!, ...walls.slice(5)], section).reason!, /wall 6 /);
  match(wallsComplete([...walls, 7e-3], section).reason!, /output facet/);
  match(wallsComplete([NaN, ...walls], section).reason!, /wall 1 /);
});

Deno.test("wallsComplete() remarks the signs of a single missing wall", () => {
  const lost = walls.filter((_, j) => j !== 100);
  const verdict = wallsComplete(lost, section);
  ok(verdict.complete);
  strictEqual(verdict.remarks.length, 2);
  match(verdict.remarks[0]!, /odd number of walls \(399\)/);
  match(verdict.remarks[1]!, /a domain about one period long, ending at 2\.015 mm: a wall may be missing/);
  // A missing inverted domain leaves one and a half periods, and an even number: nothing to remark.
  deepStrictEqual(wallsComplete(walls.filter((_, j) => j !== 100 && j !== 101), section).remarks, []);
  // Poled up to the facet the parity says nothing.
  strictEqual(wallsComplete(walls.slice(0, -1), { ...section, guideLength: 5e-3 }).remarks.length, 0);
});

Deno.test("gratingFromWalls() widens the section to walls beyond it", () => {
  const grating = gratingFromWalls(walls.map((z) => z - 30e-6), section);
  assertClose(grating.start, 1e-3 - 25e-6, { rel: 1e-12 });
  strictEqual(grating.end, 5e-3);
  strictEqual(grating.firstSign, 1);
  throws(() => gratingFromWalls(walls.toReversed(), section), RangeError);
});

Deno.test("wallStatistics() counts missing and merged domains and leaves merged ones out of the duty", () => {
  const made = uniformGrating({ start: 0, length: 100, period: 1, duty: 0.4 });
  const without = made.walls.filter((_, j) => j !== 20 && j !== 21 && j !== 61 && j !== 62);
  const found = wallStatistics({ ...made, walls: without }, 1);
  strictEqual(found.domains, 98);
  strictEqual(found.merged, 2);
  strictEqual(found.missing, 0.02);
  strictEqual(found.used, 97);
  assertClose(found.dutyMean, 0.4, { rel: 1e-12 });
  assertClose(found.dutySd, 0, { abs: 1e-12 });
  assertClose(found.period, 1, { rel: 1e-12 });
  assertClose(found.centreSd, 0, { abs: 1e-10 });
});

Deno.test("wallStatistics() finds a period that differs from the design's", () => {
  const made = uniformGrating({ start: 0, length: 200, period: 1.0004 });
  assertClose(wallStatistics(made, 1).period, 1.0004, { rel: 1e-12 });
});

Deno.test("wallStatistics() of no walls says that all are missing, and NaN for what was not seen", () => {
  const found = wallStatistics({ walls: new Float64Array(0), start: 0, end: 10, firstSign: 1 }, 1);
  strictEqual(found.missing, 1);
  ok(Number.isNaN(found.dutyMean) && Number.isNaN(found.dutySd) && Number.isNaN(found.period));
});
