import assert from "node:assert/strict";
import { CONTRADICTION_ALPHA, pooled } from "../../../models/pooling/mod.ts";
import { yieldRange } from "../../../models/decision/yields.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";
import { type Layout, type Simulated, simulateLots } from "./simulated_lots.ts";

const SPREAD = { lotSd: 0.05, waferSd: 0.03, dieSd: 0.02, guideSd: 0.02 };
const DEFAULT = { value: 0.5, u: 0.1, from: "p" };
const LAYOUT: Layout = {
  lots: 1,
  wafers: 2,
  wafersRead: 2,
  dies: 4,
  diesRead: 3,
  guides: 4,
  guidesRead: 3,
  u: [0.005, 0.02],
};
const lots = (seed: string) => simulateLots(LAYOUT, { mean: 0.5, spread: SPREAD }, randomFrom(seed));
const pool = ({ observations, places }: Pick<Simulated, "observations" | "places">) =>
  pooled(observations, places, SPREAD, DEFAULT, "L0", { trendFrom: Infinity });

Deno.test("good readings are hardly ever named", () => {
  const tries = 60;
  let named = 0;
  for (let n = 0; n < tries; n++) if (pool(lots(`good ${n}`)).contradictions().length > 0) named++;
  const { high } = yieldRange(new Float64Array(tries).fill(CONTRADICTION_ALPHA), 0.999);
  assert.ok(named <= high, `${named} of ${tries}, at most ${high}`);
});

Deno.test("a reading that contradicts its neighbours is named, and nothing else; the estimate still uses it", () => {
  for (let n = 0; n < 15; n++) {
    const sim = lots(`planted ${n}`);
    const bad = sim.observations[n]!;
    const planted = sim.observations.map((o) => o === bad ? { ...o, value: o.value + 0.3 } : o);
    const found = pool({ ...sim, observations: planted });
    const named = found.contradictions();
    assert.deepEqual(named.map((c) => [c.unit, [...c.readings]]), [[bad.guide, [bad.index]]], `try ${n}`);
    const { value, expected, uExpected, standardised, p } = named[0]!;
    assertClose(value, bad.value + 0.3, { rel: 1e-12 });
    assert.ok(Math.abs(expected - bad.value) < 4 * uExpected && p < CONTRADICTION_ALPHA / 18);
    assertClose(standardised, (value - expected) / uExpected, { rel: 1e-12 });
    const estimate = found.estimate(sim.guides.find((g) => g.guide === bad.guide)!);
    assert.deepEqual([...estimate.used], [bad.index]);
    assert.ok(estimate.value > expected + 0.1, "kept in the estimate");
  }
});

Deno.test("two bad readings do not hide each other", () => {
  const sim = lots("two");
  const [a, b] = [sim.observations[1]!, sim.observations[10]!];
  const planted = sim.observations.map((o) =>
    o === a ? { ...o, value: o.value + 0.4 } : o === b ? { ...o, value: o.value - 0.4 } : o
  );
  const named = pool({ ...sim, observations: planted }).contradictions();
  assert.deepEqual(new Set(named.flatMap((c) => c.readings)), new Set([a.index, b.index]));
});

Deno.test("one bad repeat among several of a guide is named by itself", () => {
  const sim = lots("repeats");
  const first = sim.observations[0]!;
  const repeats = [0.001, -0.002, 0.25].map((off, k) => ({
    ...first,
    value: first.value + off,
    u: 0.01,
    index: 100 + k,
  }));
  const named = pool({ ...sim, observations: [...sim.observations, ...repeats] }).contradictions();
  assert.deepEqual(named.map((c) => [...c.readings]), [[102]]);
});

Deno.test("a single reading has nothing to contradict", () => {
  const sim = lots("one");
  const one = { ...sim, observations: [{ ...sim.observations[0]!, value: 50 }] };
  assert.deepEqual(pool(one).contradictions(), []);
});
