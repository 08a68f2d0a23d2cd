// Pure: no I/O, no clock, no hidden randomness.
import type { FixedEffects } from "./fixed_effects.ts";
import type { Forest } from "./forest.ts";
import type { Asked } from "./lot_fit.ts";
import type { NodeSums, Sweep, Variances } from "./sweep.ts";

/** Posterior of everything in one lot for one set of variances. */
export interface LotState {
  readonly effects: FixedEffects;
  /** Mean and variance; `row` is the unit's row of the design. */
  at(asked: Asked, row: readonly number[]): { m: number; v: number };
}

interface Node {
  /** Smoothed rows: what the readings say of the sum of effects down to here, for the values and every design column. */
  readonly mean: Float64Array;
  readonly variance: number;
}

/**
 * Walks from the lot down. A node's effects sum to κ·(sum above) + (1 − κ)·(mean of its readings), κ = 1/(1 + σ²·weight),
 * with variance σ²κ + κ²·(variance above); the readings' residuals are linear in the fixed effects, so the same walk over
 * the design columns gives what their uncertainty adds.
 */
export function lotState(
  forest: Forest,
  sweep: Sweep,
  variances: Variances,
  effects: FixedEffects,
  lot: string,
): LotState {
  const { columns: q } = forest;
  const [lotVar, waferVar, dieVar, guideVar] = variances;
  const wafers = new Map<string, Node>();
  const dies = new Map<string, Node>();
  const leaves = new Map<string, { leaf: number; die: Node }>();
  const step = (above: Node, sums: NodeSums, i: number, own: number): Node =>
    blend(above, sums.weight[i]!, sums.mean, i * q, own, q);
  const l = forest.lots.indexOf(lot);
  const nothing: Node = { mean: new Float64Array(q), variance: 0 };
  const top = l < 0 ? { mean: nothing.mean, variance: lotVar } : step(nothing, sweep.lots, l, lotVar);
  if (l >= 0) {
    for (let w = forest.firstWafer[l]!; w < forest.firstWafer[l + 1]!; w++) {
      const wafer = step(top, sweep.wafers, w, waferVar);
      wafers.set(forest.wafers[w]!, wafer);
      for (let d = forest.firstDie[w]!; d < forest.firstDie[w + 1]!; d++) {
        const id = forest.dies[d]!;
        if (id === null) continue;
        const die = step(wafer, sweep.dies, d, dieVar);
        dies.set(id, die);
        for (let k = forest.firstLeaf[d]!; k < forest.firstLeaf[d + 1]!; k++) {
          const { guide } = forest.leaves[k]!;
          if (guide !== undefined) leaves.set(guide, { leaf: k, die });
        }
      }
    }
  }
  const nodeOf = ({ wafer, die, guide }: Asked): Node => {
    const atWafer = wafers.get(wafer) ?? grown(top, waferVar);
    if (die === undefined) return atWafer;
    const atDie = dies.get(die) ?? grown(atWafer, dieVar);
    if (guide === undefined) return atDie;
    const own = leaves.get(guide);
    if (own === undefined) return grown(atDie, guideVar);
    return blend(atDie, 1 / forest.variance[own.leaf]!, forest.rows, own.leaf * q, guideVar, q);
  };
  const { estimate, covariance } = effects;
  const p = q - 1;
  const difference = new Float64Array(p);
  return {
    effects,
    at(asked, row) {
      const node = nodeOf(asked);
      let m = node.mean[0]!;
      let v = node.variance;
      for (let i = 0; i < p; i++) {
        difference[i] = row[i]! - node.mean[i + 1]!;
        m += difference[i]! * estimate[i]!;
      }
      for (let i = 0; i < p; i++) {
        for (let j = 0; j < p; j++) v += difference[i]! * difference[j]! * covariance[i * p + j]!;
      }
      return { m, v };
    },
  };
}

const grown = ({ mean, variance }: Node, own: number): Node => ({ mean, variance: variance + own });

function blend(above: Node, weight: number, rows: Float64Array, from: number, own: number, q: number): Node {
  const keep = 1 / (1 + own * weight);
  const mean = new Float64Array(q);
  for (let i = 0; i < q; i++) mean[i] = keep * above.mean[i]! + (1 - keep) * rows[from + i]!;
  return { mean, variance: own * keep + keep * keep * above.variance };
}
