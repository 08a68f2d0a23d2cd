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

Deno.test("a guide that only its die's windows speak of may have another duty than they, by as much as guides differ", () => {
  const seen = { from: "windows" as const, basis: "die" as const, windows: [window(0.001, 390, 0, 0.45)] };
  const duty = { value: 0.455, u: 0.02, basis: "die" as const, key: "duty" };
  const widths = (poling: typeof seen & { duty?: typeof duty }, drawn: number) => {
    const { walls } = drawGrating({ ...guide, poling }, { duty: drawn, dutySd: 0, merged: 0 }, 3);
    // Inverted domains lie between walls 0 and 1, 2 and 3 …
    const inverted = Array.from({ length: walls.length >> 1 }, (_, k) => walls[2 * k + 1]! - walls[2 * k]!);
    return inverted.reduce((a, b) => a + b, 0) / inverted.length / guide.period;
  };
  const own = widths(seen, 0.6);
  assertClose(own, 0.45, { abs: 0.002 });
  assertClose(widths({ ...seen, duty }, 0.455), own, { rel: 1e-12 });
  assertClose(widths({ ...seen, duty }, 0.475) - own, 0.02, { rel: 0.01 });
});
