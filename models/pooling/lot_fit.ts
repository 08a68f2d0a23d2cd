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
import { type FixedEffects, fixedEffects } from "./fixed_effects.ts";
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
  readonly mode: SpreadMode;
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

/** Density of the spreads for a design. Values are counted from their mean: what is common to all would cost digits. */
export function spreadDensityOf(leaves: readonly Leaf[], design: Design, prior: SpreadPrior) {
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
  return { forest, effects, density: spreadDensity(forest, prior, effects), reference };
}

/** The same with its maximum. */
export function spreadsOf(
  leaves: readonly Leaf[],
  design: Design,
  prior: SpreadPrior,
  start?: ArrayLike<number>,
) {
  const found = spreadDensityOf(leaves, design, prior);
  return { ...found, mode: spreadMode(found.density, prior, start) };
}

/**
 * Fits the hierarchical model: trait = fixed effects + lot + wafer + die + guide effect, all normal, reading variances
 * known. Fixed effects are integrated in closed form, the standard deviations of the effects on a lattice: their
 * uncertainty is in every answer (A. Gelman et al., Bayesian Data Analysis, ch. 5; from memory).
 *
 * @param lots the lots that will be asked about; one without readings is any name that no reading has
 * @returns the fit as seen from one of them
 */
export function fitLots(
  leaves: readonly Leaf[],
  design: Design,
  prior: SpreadPrior,
  lots: readonly string[],
  start?: ArrayLike<number>,
): (lot: string) => LotFit {
  const { forest, effects, density, mode, reference } = spreadsOf(leaves, design, prior, start);
  const open = openLevels(prior);
  const sweep = sweepFor(forest);
  const answers = new Map(lots.map((lot) => [lot, new LotStates(forest, lot)]));
  const found: FixedEffects[] = [];
  const points = lattice(density, mode, mode.curvature.map((c) => curvatureAtLeast(c, prior)))
    .map(({ at, share }) => {
      const variances = variancesAt(at, open);
      const given = fixedEffects(sweepInto(forest, variances, sweep), effects);
      for (const states of answers.values()) states.add(share, sweep, variances, given);
      found.push(given);
      return { share, variances };
    });
  const variances = variancesAt(mode.at, open);
  const common = {
    mode,
    forest,
    variances,
    sweep: sweepInto(forest, variances, sweep),
    points,
    effects: namedEffects(design, Float64Array.from(points, (p) => p.share), found, reference),
  };
  return (lot) => {
    const states = answers.get(lot);
    if (states === undefined) {
      throw new RangeError(`Cannot answer for lot ${lot}: fitted for ${lots.join(", ")}`);
    }
    return {
      ...common,
      ask(asked) {
        const extra = design.newWidthVariance(asked.widthUm);
        const { share, mean, variance } = states.ask(asked, design.rowOf(asked));
        return { share, mean: mean.map((m) => m + reference), variance: variance.map((v) => v + extra) };
      },
    };
  };
}

function namedEffects(
  { names }: Design,
  share: Float64Array,
  found: readonly FixedEffects[],
  reference: number,
): LotFit["effects"] {
  return names.map((name, i) => {
    const mean = Float64Array.from(found, (f) => f.estimate[i]!);
    const variance = Float64Array.from(found, (f) => f.covariance[i * names.length + i]!);
    const { value, u } = joined({ share, mean, variance });
    return { name, value: value + (i === 0 ? reference : 0), u };
  });
}

/** Mean and standard deviation of a mixture. */
export function joined({ share, mean, variance }: Mixture): { value: number; u: number } {
  let value = 0;
  for (let k = 0; k < share.length; k++) value += share[k]! * mean[k]!;
  let total = 0;
  for (let k = 0; k < share.length; k++) total += share[k]! * (variance[k]! + (mean[k]! - value) ** 2);
  return { value, u: Math.sqrt(total) };
}
