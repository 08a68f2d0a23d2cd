import { deepEqual, equal, ok } from "node:assert/strict";
import { operatingPoints, type OperatingQuestion } from "../../../models/decision/mod.ts";
import { drawOperatingPoints } from "../../../models/decision/operating_draws.ts";
import { gratingFromWalls, uniformGrating } from "../../../models/poling/mod.ts";
import { assertClose } from "../../assert_close.ts";
import { ktp } from "./a_guide.ts";

/** A guide whose walls lie 2e-4 wider than drawn, with a wander of their own. */
const STRETCHED = uniformGrating({ start: 0.0005, length: 0.007, period: 46.05e-6 * 1.0002, duty: 0.5 });
const WALLS = gratingFromWalls(STRETCHED.walls.map((z, j) => z + 0.4e-6 * Math.sin(0.7 * j)), {
  poledFrom: 0.0005,
  poledLength: 0.007,
  period: 46.05e-6,
  guideLength: 0.008,
});
const asked = (over: Partial<OperatingQuestion>): OperatingQuestion => ({
  waves: {
    lambdaP: 791e-9,
    lambdaS: 1582e-9,
    lambdaI: 1582e-9,
    polP: "TE",
    polS: "TE",
    polI: "TM",
  },
  oven: [60, 90],
  tunable: null,
  geometry: { width_um: 3 },
  period: 46.05e-6,
  poledLength: 0.007,
  walls: WALLS,
  ...over,
});

/** Every draw beside a search of its own. */
function compare(question: OperatingQuestion, offsets: Float64Array) {
  const points = operatingPoints(ktp, question);
  if ("reason" in points) throw new Error(points.reason);
  const nominal = points.at(0);
  const draws = drawOperatingPoints(ktp, question, points, nominal, 0, offsets);
  const searched = [...offsets].map((offset) => points.at(offset));
  return { nominal, draws, searched };
}

Deno.test("where the walls' own peak is out of the oven's reach, draws that reach it match where a search of their own does", () => {
  const offsets = Float64Array.from({ length: 33 }, (_, k) => 20 * (k - 16));
  const { nominal, draws, searched } = compare(asked({}), offsets);
  equal(nominal.matched, false);
  const matched = searched.map((p) => p.matched ? 1 : 0);
  ok(matched.includes(1) && matched.includes(0));
  deepEqual([...draws.matched], matched);
  searched.forEach((p, k) => {
    if (p.matched) assertClose(draws.temperatureC[k]!, p.temperatureC, { abs: 2e-3 }, `${offsets[k]} 1/m`);
  });
});

Deno.test("draws of a guide that its pump has to be tuned for are tuned to where a search of their own tunes it", () => {
  const offsets = Float64Array.of(-40, -20, 0, 20, 40);
  const { nominal, draws, searched } = compare(asked({ tunable: [770e-9, 810e-9] }), offsets);
  deepEqual([nominal.matched, nominal.tuned], [true, true]);
  searched.forEach((p, k) => {
    equal(draws.matched[k], p.matched ? 1 : 0);
    // Looked for in 120 steps of the 40 nm.
    assertClose(draws.lambdaP[k]!, p.waves.lambdaP, { abs: 0.34e-9 });
  });
});
