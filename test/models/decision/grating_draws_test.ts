import assert from "node:assert/strict";
import {
  convertingStretches,
  drawGrating,
  windowStatistics,
} from "../../../models/decision/grating_draws.ts";
import { gratingFromWalls } from "../../../models/poling/mod.ts";
import { assertClose } from "../../assert_close.ts";
import { guide } from "./a_guide.ts";

const window = (from: number, domains: number, merged: number, dutyMean: number) => ({
  from,
  length: 0.006,
  domains,
  merged,
  dutyMean,
  dutySd: 0.02,
});

Deno.test("windowStatistics() takes the duty of a window without domains from those beside it", () => {
  const found = windowStatistics([
    window(0.001, 130, 0, 0.44),
    window(0.007, 0, 130, 0),
    window(0.013, 130, 0, 0.48),
  ]);
  assert.deepEqual(found.map((w) => w.missing), [0, 1, 0]);
  assertClose(found[1]!.duty, 0.46, { rel: 1e-12 });
  const atTheEnd = windowStatistics([window(0.001, 0, 130, 0), window(0.007, 130, 0, 0.44)]);
  assertClose(atTheEnd[0]!.duty, 0.44, { rel: 1e-12 });
});

Deno.test("a window whose domains are all missing leaves a stretch that makes no pairs", () => {
  const poling = {
    from: "windows" as const,
    basis: "measured" as const,
    windows: [window(0.001, 130, 0, 0.5), window(0.007, 130, 0, 0.5), window(0.013, 0, 130, 0)],
  };
  const dead = { ...guide, poling };
  const grating = drawGrating(dead, { duty: 0, dutySd: 0, merged: 0 }, 0);
  // Linear between the middles: all are there up to 10 mm, none behind 16 mm.
  assert.ok(grating.walls.at(-1)! < 0.016);
  const poled = convertingStretches(dead, grating).reduce((sum, s) => sum + s.to - s.from, 0);
  assert.ok(poled > 0.009 && poled < 0.0155, `${poled} m`);
});

Deno.test("convertingStretches() of walls at both ends and none between is the whole section", () => {
  const section = {
    poledFrom: guide.poledFrom,
    poledLength: guide.poledLength,
    period: guide.period,
    guideLength: guide.length,
  };
  const grating = gratingFromWalls(Float64Array.of(0.001, 0.019), section);
  assert.deepEqual(convertingStretches(guide, grating), [{ from: 0.001, to: 0.019 }]);
});
