import assert from "node:assert/strict";
import { type Place, pooled, STRONG_EVIDENCE } from "../../../models/pooling/mod.ts";
import { yieldRange } from "../../../models/decision/yields.ts";
import { randomFrom } from "../../../shared/random.ts";
import { type Layout, simulateLots } from "./simulated_lots.ts";

const SPREAD = { lotSd: 0.05, waferSd: 0.03, dieSd: 0.02, guideSd: 0.02 };
const DEFAULT = { value: 0.5, u: 0.1, from: "p" };
const LAYOUT: Layout = {
  lots: 2,
  wafers: 2,
  wafersRead: 2,
  dies: 16,
  diesRead: 9,
  guides: 2,
  guidesRead: 1,
  u: [0.005, 0.02],
};
const lots = (seed: string, trend?: (place: Place) => number) =>
  simulateLots(
    LAYOUT,
    { mean: 0.5, spread: SPREAD, ...(trend === undefined ? {} : { trend }) },
    randomFrom(seed),
  );
const pool = (sim: ReturnType<typeof lots>) => pooled(sim.observations, sim.places, SPREAD, DEFAULT, "L0");

Deno.test("no trend is taken where there is none: at most one in twenty", () => {
  const tries = 80;
  let taken = 0;
  for (let n = 0; n < tries; n++) if (pool(lots(`flat ${n}`)).trend.taken !== null) taken++;
  assert.ok(
    taken <= yieldRange(new Float64Array(tries).fill(1 / STRONG_EVIDENCE), 0.999).high,
    `${taken} of ${tries}`,
  );
});

Deno.test("a strong radial trend is taken, and unread dies follow it", () => {
  // 0 in the middle, 0.2 at the corner dies, ten times the spread of dies.
  const trend = ({ x, y }: Place) => 0.2 * (x * x + y * y) / 4.5;
  for (let n = 0; n < 10; n++) {
    const sim = lots(`radial ${n}`, trend);
    const { trend: found, estimate, effects } = pool(sim);
    assert.equal(found.taken?.radial, true, `try ${n}`);
    const slope = effects.find((e) => e.name === "radial")!;
    assert.ok(Math.abs(slope.value - 0.2) < 4 * slope.u, `${slope.value} ± ${slope.u}`);
    const corner = sim.guides.find((g) => {
      const { x, y } = sim.places.get(g.die)!;
      return g.lot === "L0" && x * x + y * y === 4.5 && estimate(g).basis === "wafer";
    });
    if (corner === undefined) continue;
    const { value, u } = estimate(corner);
    assert.ok(Math.abs(value - corner.truth) < 4 * u && u < 0.05, `${value} ± ${u}, truth ${corner.truth}`);
  }
});

Deno.test("a tilt of one lot only is taken for that lot only", () => {
  const tilted = lots("tilt", ({ x }) => 0.1 * x);
  const flat = lots("tilt");
  const mixed = {
    ...tilted,
    observations: tilted.observations.map((o, k) => o.lot === "L0" ? o : flat.observations[k]!),
  };
  assert.deepEqual(pool(mixed).trend.taken, { radial: false, linear: true, lots: "own" });
});

Deno.test("two dies, or dies without a place, never make a trend", () => {
  const sim = lots("few", ({ x }) => 10 * x);
  const two = sim.observations.filter((o) => ["L0-0/0", "L0-0/1"].includes(o.die!));
  assert.deepEqual(pool({ ...sim, observations: two }).trend, { taken: null, trials: [] });
  assert.deepEqual(pool({ ...sim, places: new Map() }).trend, { taken: null, trials: [] });
});
