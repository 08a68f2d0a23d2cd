// Pure: no I/O, no clock, no hidden randomness.
import {
  curvatureAtLeast,
  openLevels,
  spreadDensity,
  type SpreadMode,
  spreadMode,
  type SpreadPrior,
  variancesAt,
} from "./components.ts";
import type { Design } from "./design.ts";
import { fixedEffects } from "./fixed_effects.ts";
import { type Forest, forestOf, type Leaf } from "./forest.ts";
import { lattice } from "./_lattice.ts";
import { LotStates } from "./lot_state.ts";
import { type Sweep, sweepFor, sweepInto, type Variances } from "./sweep.ts";

/** Normal distributions of one quantity, one for each point of the integration over the spreads. */
export interface Mixture {
  readonly share: Float64Array;
  readonly mean: Float64Array;
  readonly variance: Float64Array;
}

/** What a value is asked for; without a guide the value of the die, without a die that of the wafer. */
export type Asked = Pick<Leaf, "lot" | "wafer" | "die" | "guide" | "widthUm">;

/** The model fitted to readings of all lots, and what it says about one lot. */
export interface LotFit {
  readonly forest: Forest;
  /** The most probable variances, and the sums of the readings there. */
  readonly variances: Variances;
  readonly sweep: Sweep;
  /** Points of the integration: share and variances. */
  readonly points: readonly { readonly share: number; readonly variances: Variances }[];
  /** Fixed effects: mean and standard deviation, in the order of the design. */
  readonly effects: readonly { readonly name: string; readonly value: number; readonly u: number }[];
  /** Posterior of the value of something in this lot. */
  ask(asked: Asked): Mixture;
}

/** Density of the spreads and its maximum: all that a comparison of models needs. */
export function spreadsOf(
  leaves: readonly Leaf[],
  design: Design,
  prior: SpreadPrior,
  start?: ArrayLike<number>,
) {
  const reference = leaves.reduce((sum, l) => sum + l.value, 0) / leaves.length;
  const forest = forestOf(
    leaves,
    design.names.length + 1,
    (leaf) => [leaf.value - reference, ...design.rowOf(leaf)],
  );
  const effects = {
    mean: design.prior.mean.map((m, i) => i === 0 ? m - reference : m),
    sd: design.prior.sd,
  };
  const density = spreadDensity(forest, prior, effects);
  const mode = spreadMode(density, prior, start);
  return { forest, effects, density, mode, reference };
}

/**
 * Fits the hierarchical model: trait = fixed effects + lot + wafer + die + guide effect, all normal, reading variances
 * known. Fixed effects are integrated in closed form, the standard deviations of the effects on a lattice: their
 * uncertainty is in every answer (A. Gelman et al., Bayesian Data Analysis, ch. 5; from memory).
 */
export function fitLot(
  leaves: readonly Leaf[],
  design: Design,
  prior: SpreadPrior,
  lot: string,
  start?: ArrayLike<number>,
): LotFit & { readonly mode: SpreadMode } {
  const { forest, effects, density, mode, reference } = spreadsOf(leaves, design, prior, start);
  const open = openLevels(prior);
  const places = lattice(density, mode, mode.curvature.map((c) => curvatureAtLeast(c, prior)));
  const sweep = sweepFor(forest);
  const answers = new LotStates(forest, lot);
  const points = places.map(({ at, share }) => {
    const variances = variancesAt(at, open);
    answers.add(share, sweepInto(forest, variances, sweep), variances, fixedEffects(sweep, effects));
    return { share, variances };
  });
  const { states } = answers;
  const share = Float64Array.from(points, (p) => p.share);
  const variances = variancesAt(mode.at, open);
  return {
    mode,
    forest,
    variances,
    sweep: sweepInto(forest, variances, sweep),
    points,
    effects: design.names.map((name, i) => {
      const mixed = joined({
        share,
        mean: Float64Array.from(states, (s) => s.effects.estimate[i]!),
        variance: Float64Array.from(states, (s) => s.effects.covariance[i * design.names.length + i]!),
      });
      return { name, value: mixed.value + (i === 0 ? reference : 0), u: mixed.u };
    }),
    ask(asked) {
      const extra = design.newWidthVariance(asked.widthUm);
      const { share, mean, variance } = answers.ask(asked, design.rowOf(asked));
      return { share, mean: mean.map((m) => m + reference), variance: variance.map((v) => v + extra) };
    },
  };
}

/** Mean and standard deviation of a mixture. */
export function joined({ share, mean, variance }: Mixture): { value: number; u: number } {
  let value = 0;
  for (let k = 0; k < share.length; k++) value += share[k]! * mean[k]!;
  let total = 0;
  for (let k = 0; k < share.length; k++) total += share[k]! * (variance[k]! + (mean[k]! - value) ** 2);
  return { value, u: Math.sqrt(total) };
}
