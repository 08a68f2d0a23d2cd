import { spreadPrior } from "../../../models/pooling/mod.ts";
import { spreadDensity, variancesAt } from "../../../models/pooling/components.ts";
import { designOf } from "../../../models/pooling/design.ts";
import { fixedEffects } from "../../../models/pooling/fixed_effects.ts";
import { leavesOf } from "../../../models/pooling/forest.ts";
import { fitLots, joined, spreadDensityOf } from "../../../models/pooling/lot_fit.ts";
import { LotStates } from "../../../models/pooling/lot_state.ts";
import { sweepFor, sweepInto } from "../../../models/pooling/sweep.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";
import { simulateLots } from "./simulated_lots.ts";

/** Posterior means and standard deviations by a dense grid over all log standard deviations, ±5 prior ones about the prior. */
function byGrid(spread: Parameters<typeof spreadPrior>[0], open: number[], guidesRead: number, seed: string) {
  const { observations, places } = simulateLots(
    { lots: 2, wafers: 1, wafersRead: 1, dies: 4, diesRead: 3, guides: 4, guidesRead, u: [0.01, 0.02] },
    { mean: 0.5, spread },
    randomFrom(seed),
  );
  const leaves = leavesOf(observations, 0.1);
  const prior = spreadPrior(spread, 2);
  const question = {
    leaves,
    mean: { value: 0.5, u: 0.08 },
    widthSd: 0.1,
    trend: null,
    trendSd: 0.1,
    places,
    lot: "L0",
  };
  const design = designOf(question);
  const fit = fitLots(leaves, design, prior, ["L0"])("L0");
  const asked = [
    { lot: "L0", wafer: "L0-0", die: "L0-0/0", guide: "L0-0/0/g0" },
    { lot: "L0", wafer: "L0-0", die: "L0-0/0", guide: "L0-0/0/g3" },
    { lot: "L0", wafer: "L0-0", die: "L0-0/3", guide: "L0-0/3/g0" },
    { lot: "L0", wafer: "L0-9", die: "L0-9/3", guide: "L0-9/3/g0" },
  ];
  const { forest, effects, reference } = spreadDensityOf(leaves, design, prior);
  const density = spreadDensity(forest, prior, effects);
  const states = new LotStates(forest, "L0");
  const sweep = sweepFor(forest);
  const sds = [spread.lotSd, spread.waferSd, spread.dieSd, spread.guideSd];
  const points: { at: number[]; log: number }[] = [];
  const steps = open.length === 2 ? 80 : 30;
  const walk = (at: number[]): void => {
    if (at.length === open.length) {
      points.push({ at, log: density(at) });
      return;
    }
    const centre = Math.log(sds[open[at.length]!]!) - prior.logSd ** 2;
    for (let k = 0; k <= steps; k++) walk([...at, centre + prior.logSd * 5 * (2 * k / steps - 1)]);
  };
  walk([]);
  const best = points.reduce((m, p) => Math.max(m, p.log), -Infinity);
  const kept = points.filter((p) => p.log > best - 14);
  const total = kept.reduce((s, p) => s + Math.exp(p.log - best), 0);
  for (const { at, log } of kept) {
    const variances = variancesAt(at, open);
    sweepInto(forest, variances, sweep);
    states.add(Math.exp(log - best) / total, sweep, variances, fixedEffects(sweep, effects));
  }
  asked.forEach((a, k) => {
    const [exact, found] = [joined(states.ask(a, design.rowOf(a))), joined(fit.ask(a))];
    assertClose(found.value, exact.value + reference, { abs: 0.01 * exact.u }, `value ${k}, ${seed}`);
    assertClose(found.u, exact.u, { rel: 0.01 }, `u ${k}, ${seed}`);
  });
}

Deno.test("the lattice over the spreads agrees with a dense grid within a hundredth of u", () => {
  byGrid({ lotSd: 0, waferSd: 0, dieSd: 0.02, guideSd: 0.02 }, [2, 3], 2, "two levels");
  byGrid({ lotSd: 0.05, waferSd: 0, dieSd: 0.02, guideSd: 0.02 }, [0, 2, 3], 2, "three levels");
});

Deno.test("the lattice follows the bent density of two spreads that the readings cannot tell apart", () => {
  // One guide a die: only the sum of the two variances is seen.
  byGrid({ lotSd: 0, waferSd: 0, dieSd: 0.04, guideSd: 0.04 }, [2, 3], 1, "one guide a die");
});
