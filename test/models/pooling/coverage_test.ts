import assert from "node:assert/strict";
import { LEVELS, pooled, type PoolOptions, spreadPrior } from "../../../models/pooling/mod.ts";
import { yieldRange } from "../../../models/decision/yields.ts";
import { randomFrom } from "../../../shared/random.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import { BASES } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";
import { drawnSd, type Layout, type Simulated, simulateLots } from "./simulated_lots.ts";

const LOTS = 500;
/** For the further cases. */
const FEWER = 200;
const DEFAULT = { value: 0.5, u: 0.1, from: "platform" };
const SPREAD = { lotSd: 0.05, waferSd: 0.03, dieSd: 0.02, guideSd: 0.02 };
/** What the effects leave of the default's u: the prior of the mean. */
const MEAN_SD = Math.sqrt(0.1 ** 2 - 0.05 ** 2 - 0.03 ** 2 - 0.02 ** 2 - 0.02 ** 2);
const NEVER: PoolOptions = { trendFrom: Infinity };

/** Truth drawn from the stated priors: mean and spreads anew for every simulated set of lots. */
function drawn(layout: Layout, seed: string) {
  const random = randomFrom(seed);
  const { logSd } = spreadPrior(SPREAD, 2);
  const spread = {
    lotSd: drawnSd(SPREAD.lotSd, logSd, random),
    waferSd: drawnSd(SPREAD.waferSd, logSd, random),
    dieSd: drawnSd(SPREAD.dieSd, logSd, random),
    guideSd: drawnSd(SPREAD.guideSd, logSd, random),
  };
  const truth = { mean: DEFAULT.value + MEAN_SD * random.normal(), spread };
  return { sim: simulateLots(layout, truth, random), spread, random };
}

/** Within the central 99.9 % of a binomial count at the nominal 95 %. */
function assertNominal(covered: number, of: number, what: string): void {
  const { low, high } = yieldRange(new Float64Array(of).fill(0.95), 0.999);
  assert.ok(covered >= low && covered <= high, `${what}: ${covered} of ${of} covered, need ${low}…${high}`);
}

/** One guide of lot L0 for every basis: the first ones are read, the last ones are not. */
function oneOfEach({ guides }: Simulated, { wafersRead, diesRead, guidesRead }: Layout) {
  const ids = {
    measured: "L0-0/0/g0",
    die: `L0-0/0/g${guidesRead}`,
    wafer: `L0-0/${diesRead}/g0`,
    lot: `L0-${wafersRead}/0/g0`,
  };
  return Object.entries(ids).map(([basis, id]) => ({ basis, guide: guides.find((g) => g.guide === id)! }));
}

function coverage(layout: Layout, seed: string, lots: number) {
  const covered = new Map<string, number>();
  const off = LEVELS.map(() => [] as number[]);
  for (let n = 0; n < lots; n++) {
    const { sim, spread } = drawn(layout, `${seed} ${n}`);
    const pool = pooled(sim.observations, sim.places, SPREAD, DEFAULT, "L0", NEVER);
    for (const { basis, guide } of oneOfEach(sim, layout)) {
      const { value, u, basis: found } = pool.estimate(guide);
      assert.equal(found, basis);
      const inside = Math.abs(guide.truth - value) <= 1.959964 * u ? 1 : 0;
      covered.set(basis, (covered.get(basis) ?? 0) + inside);
    }
    const truth = [spread.lotSd, spread.waferSd, spread.dieSd, spread.guideSd];
    LEVELS.forEach((level, i) => off[i]!.push(pool.spreads![level].value - truth[i]!));
  }
  return { covered, off };
}

Deno.test("95 % intervals cover 95 % of truths drawn from the priors, for every basis; the spreads are unbiased", () => {
  const layout: Layout = {
    lots: 2,
    wafers: 3,
    wafersRead: 2,
    dies: 4,
    diesRead: 3,
    guides: 4,
    guidesRead: 2,
    u: [0.005, 0.03],
  };
  const { covered, off } = coverage(layout, "two lots", LOTS);
  assert.deepEqual([...covered.keys()], BASES.filter((b) => b !== "platform"));
  for (const [basis, count] of covered) assertNominal(count, LOTS, basis);
  LEVELS.forEach((level, i) => {
    const error = standardDeviation(off[i]!) / Math.sqrt(LOTS);
    assertClose(mean(off[i]!), 0, { abs: 3.3 * error }, `bias of the ${level} spread`);
  });
});

Deno.test("95 % intervals cover 95 % of truths when one lot has two readings", () => {
  const layout: Layout = {
    lots: 1,
    wafers: 2,
    wafersRead: 1,
    dies: 3,
    diesRead: 2,
    guides: 3,
    guidesRead: 1,
    u: [0.01, 0.03],
  };
  const { covered } = coverage(layout, "two readings", FEWER);
  assert.equal(covered.size, 4);
  for (const [basis, count] of covered) assertNominal(count, FEWER, basis);
});

Deno.test("a lot without readings is covered at least as often as its interval says", () => {
  const layout: Layout = {
    lots: 3,
    wafers: 2,
    wafersRead: 2,
    dies: 3,
    diesRead: 2,
    guides: 3,
    guidesRead: 2,
    u: [0.005, 0.03],
  };
  let covered = 0;
  for (let n = 0; n < FEWER; n++) {
    const { sim } = drawn(layout, `unread ${n}`);
    const others = sim.observations.filter((o) => o.lot !== "L2");
    const guide = sim.guides.find((g) => g.lot === "L2")!;
    const { value, u, basis } = pooled(others, sim.places, SPREAD, DEFAULT, "L2", NEVER).estimate(guide);
    assert.equal(basis, "platform");
    assert.ok(u >= DEFAULT.u);
    if (Math.abs(guide.truth - value) <= 1.959964 * u) covered++;
  }
  assert.ok(covered >= yieldRange(new Float64Array(FEWER).fill(0.95), 0.999).low, `${covered} covered`);
});

Deno.test("bounded intervals cover truths that lie on or near their bound", () => {
  // Losses about 0.06 with spreads of 0.04: one truth in ten would be negative and is 0 instead; readings scatter about it.
  const spread = { lotSd: 0.03, waferSd: 0.02, dieSd: 0.015, guideSd: 0.02 };
  const layout: Layout = {
    lots: 2,
    wafers: 2,
    wafersRead: 1,
    dies: 3,
    diesRead: 2,
    guides: 3,
    guidesRead: 2,
    u: [0.01, 0.04],
  };
  const covered = new Map<string, number>();
  for (let n = 0; n < FEWER; n++) {
    const sim = simulateLots(layout, { mean: 0.06, spread }, randomFrom(`bounded ${n}`));
    const truths = new Map(sim.guides.map((g) => [g.guide, g.truth]));
    const observations = sim.observations.map((o) => ({
      ...o,
      value: o.value - Math.min(0, truths.get(o.guide!)!),
    }));
    const fallback = { value: 0.06, u: 0.05, from: "p" };
    const pool = pooled(observations, sim.places, spread, fallback, "L0", { ...NEVER, bounds: { low: 0 } });
    for (const { basis, guide } of oneOfEach(sim, layout)) {
      const { basis: found, bounded } = pool.estimate(guide);
      const { lo, hi } = bounded!;
      assert.equal(found, basis);
      const truth = Math.max(0, guide.truth);
      covered.set(basis, (covered.get(basis) ?? 0) + (truth >= lo && truth <= hi ? 1 : 0));
    }
  }
  const { low } = yieldRange(new Float64Array(FEWER).fill(0.95), 0.999);
  assert.equal(covered.size, 4);
  for (const [basis, count] of covered) assert.ok(count >= low, `${basis}: ${count} of ${FEWER} covered`);
});
