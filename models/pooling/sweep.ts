// Pure: no I/O, no clock, no hidden randomness.
import type { Forest } from "./forest.ts";

/** Variances of the effects, widest level first: lot, wafer, die, guide. */
export type Variances = readonly [lot: number, wafer: number, die: number, guide: number];

/** The nodes of one level. Means are row-major, `columns` numbers a node. */
export interface NodeSums {
  /** Precision of the node's readings about its own value: 1ᵀV⁻¹1, V without the node's effect and the wider ones. */
  readonly weight: Float64Array;
  /** What is left of it when the node's own effect is added: weight/(1 + σ²·weight). */
  readonly lifted: Float64Array;
  /** Mean of the rows below the node, weighted by V⁻¹. */
  readonly mean: Float64Array;
}

export interface Sweep {
  readonly lots: NodeSums;
  readonly wafers: NodeSums;
  readonly dies: NodeSums;
  readonly leafWeight: Float64Array;
  /** ZᵀV⁻¹Z of all leaves, V with every effect, Z their rows; row-major, only the upper triangle is filled. */
  readonly cross: Float64Array;
  /** ln |V|. */
  logDet: number;
}

export function sweepFor({ columns, lots, wafers, dies, leaves }: Forest): Sweep {
  const sums = (n: number): NodeSums => ({
    weight: new Float64Array(n),
    lifted: new Float64Array(n),
    mean: new Float64Array(n * columns),
  });
  return {
    lots: sums(lots.length),
    wafers: sums(wafers.length),
    dies: sums(dies.length),
    leafWeight: new Float64Array(leaves.length),
    cross: new Float64Array(columns * columns),
    logDet: 0,
  };
}

/**
 * Fills a sweep from the leaves up, in a time that grows with the number of leaves. An effect shared by all leaves of a
 * node adds σ²·11ᵀ to their covariance, and (V + σ²11ᵀ)⁻¹ = V⁻¹ − V⁻¹11ᵀV⁻¹·σ²/(1 + σ²·1ᵀV⁻¹1) (Sherman & Morrison): the
 * scatter about the node's mean stays as it is, and the mean goes on with the lifted weight. Sums of squares are of
 * differences throughout, so nothing cancels where errors are small beside the effects.
 */
export function sweepInto(forest: Forest, variances: Variances, out: Sweep): Sweep {
  const { columns: q } = forest;
  const [lotVar, waferVar, dieVar, guideVar] = variances;
  const { lots, wafers, dies, leafWeight, cross } = out;
  cross.fill(0);
  let logDet = 0;
  const zero = new Float64Array(q);
  // Logarithms are dear: variances are multiplied up first, as far as the exponent reaches.
  let product = 1;
  for (let k = 0; k < leafWeight.length; k++) {
    const variance = forest.variance[k]! + (forest.isGuide[k] === 1 ? guideVar : 0);
    leafWeight[k] = 1 / variance;
    product *= variance;
    if (product < 1e-150 || product > 1e150) {
      logDet += Math.log(product);
      product = 1;
    }
  }
  logDet += Math.log(product);
  for (let d = 0; d < forest.dies.length; d++) {
    gather(forest.firstLeaf, d, leafWeight, forest.rows, q, dies, cross);
    logDet += lift(dies, d, forest.dies[d] === null ? 0 : dieVar);
  }
  for (let w = 0; w < forest.wafers.length; w++) {
    gather(forest.firstDie, w, dies.lifted, dies.mean, q, wafers, cross);
    logDet += lift(wafers, w, waferVar);
  }
  for (let l = 0; l < forest.lots.length; l++) {
    gather(forest.firstWafer, l, wafers.lifted, wafers.mean, q, lots, cross);
    logDet += lift(lots, l, lotVar);
    scatter(cross, lots.lifted[l]!, lots.mean, l * q, zero, 0, q);
  }
  out.logDet = logDet;
  return out;
}

/** Weight and mean of a node from its children, and their scatter about that mean. */
function gather(
  first: Int32Array,
  node: number,
  childWeight: Float64Array,
  childMean: Float64Array,
  q: number,
  { weight, mean }: NodeSums,
  cross: Float64Array,
): void {
  const [from, to] = [first[node]!, first[node + 1]!];
  const base = node * q;
  let sum = 0;
  mean.fill(0, base, base + q);
  for (let c = from; c < to; c++) {
    const w = childWeight[c]!;
    sum += w;
    for (let i = 0; i < q; i++) mean[base + i]! += w * childMean[c * q + i]!;
  }
  for (let i = 0; i < q; i++) mean[base + i]! /= sum;
  weight[node] = sum;
  if (to - from === 1) return;
  for (let c = from; c < to; c++) scatter(cross, childWeight[c]!, childMean, c * q, mean, base, q);
}

/** cross += w (a − b)(a − b)ᵀ, upper triangle. */
function scatter(
  cross: Float64Array,
  w: number,
  a: Float64Array,
  aFrom: number,
  b: Float64Array,
  bFrom: number,
  q: number,
): void {
  for (let i = 0; i < q; i++) {
    const di = w * (a[aFrom + i]! - b[bFrom + i]!);
    // The mean's column is the same everywhere, most others are the same within a die.
    if (di === 0) continue;
    for (let j = i, c = i * q + i; j < q; j++, c++) cross[c]! += di * (a[aFrom + j]! - b[bFrom + j]!);
  }
}

/** Adds a node's own effect; returns the growth of ln |V|. */
function lift({ weight, lifted }: NodeSums, node: number, variance: number): number {
  const grown = 1 + variance * weight[node]!;
  lifted[node] = weight[node]! / grown;
  return Math.log(grown);
}
