// Pure: no I/O, no clock, no hidden randomness.
import type { FixedEffects } from "./fixed_effects.ts";
import type { Forest } from "./forest.ts";
import type { Asked, Mixture } from "./lot_fit.ts";
import type { NodeSums, Sweep, Variances } from "./sweep.ts";

/**
 * Posterior of a node for one set of variances: smoothed rows (what the readings say of the sum of effects down to there,
 * for the values and for every design column) and the variance of that sum, the fixed effects taken as known.
 */
interface Nodes {
  readonly mean: Float64Array;
  readonly variance: Float64Array;
}

/** Posterior of everything in one lot for one set of variances. */
interface State {
  readonly effects: FixedEffects;
  readonly variances: Variances;
  readonly lot: Nodes;
  readonly wafers: Nodes;
  readonly dies: Nodes;
}

/** Where something asked for sits among the nodes of a lot; −1 where nothing was read. */
interface Path {
  readonly wafer: number;
  readonly die: number;
  readonly leaf: number;
}

/**
 * Answers for one lot at every point of an integration over variances.
 *
 * A node's effects sum to κ·(sum above) + (1 − κ)·(mean of its readings), κ = 1/(1 + σ²·weight), with variance
 * σ²κ + κ²·(variance above): one walk from the lot down. What the readings say is linear in the fixed effects, so the same
 * walk over the design columns gives what the fixed effects' uncertainty adds.
 */
export class LotStates {
  readonly #forest: Forest;
  readonly #lot: number;
  readonly #firstWafer: number;
  readonly #firstDie: number;
  readonly #wafers = new Map<string, number>();
  readonly #dies = new Map<string, number>();
  readonly #leaves = new Map<string, number>();
  readonly #states: State[] = [];
  readonly #share: number[] = [];

  constructor(forest: Forest, lot: string) {
    this.#forest = forest;
    this.#lot = forest.lots.indexOf(lot);
    const { firstWafer, firstDie, firstLeaf } = forest;
    this.#firstWafer = this.#lot < 0 ? 0 : firstWafer[this.#lot]!;
    this.#firstDie = firstDie[this.#firstWafer]!;
    const last = this.#lot < 0 ? this.#firstWafer : firstWafer[this.#lot + 1]!;
    for (let w = this.#firstWafer; w < last; w++) this.#wafers.set(forest.wafers[w]!, w - this.#firstWafer);
    for (let d = this.#firstDie; d < firstDie[last]!; d++) {
      const id = forest.dies[d];
      if (id !== null && id !== undefined) this.#dies.set(id, d - this.#firstDie);
    }
    for (let k = firstLeaf[this.#firstDie]!; k < firstLeaf[firstDie[last]!]!; k++) {
      const { guide } = forest.leaves[k]!;
      if (guide !== undefined) this.#leaves.set(guide, k);
    }
  }

  /** Adds a point: the sweep at these variances is used up here and may be filled anew afterwards. */
  add(share: number, sweep: Sweep, variances: Variances, effects: FixedEffects): void {
    const q = this.#forest.columns;
    const [lotVar, waferVar, dieVar] = variances;
    const nodes = (n: number): Nodes => ({ mean: new Float64Array(n * q), variance: new Float64Array(n) });
    const lot = nodes(1);
    const [wafers, dies] = [nodes(this.#wafers.size), nodes(this.#countDies())];
    lot.variance[0] = lotVar;
    if (this.#lot >= 0) {
      lot.variance[0] = 0;
      blend(lot, 0, sweep.lots, this.#lot, lotVar, lot, 0, q);
      for (const w of this.#wafers.values()) {
        const at = this.#firstWafer + w;
        blend(lot, 0, sweep.wafers, at, waferVar, wafers, w, q);
        for (let d = this.#forest.firstDie[at]!; d < this.#forest.firstDie[at + 1]!; d++) {
          blend(wafers, w, sweep.dies, d, dieVar, dies, d - this.#firstDie, q);
        }
      }
    }
    this.#states.push({ effects, variances, lot, wafers, dies });
    this.#share.push(share);
  }

  #countDies(): number {
    if (this.#lot < 0) return 0;
    return this.#forest.firstDie[this.#firstWafer + this.#wafers.size]! - this.#firstDie;
  }

  /** @param row the design row of what is asked for */
  ask({ wafer, die, guide }: Asked, row: readonly number[]): Mixture {
    const path = {
      wafer: this.#wafers.get(wafer) ?? -1,
      die: (die === undefined ? undefined : this.#dies.get(die)) ?? -1,
      leaf: (guide === undefined ? undefined : this.#leaves.get(guide)) ?? -1,
    };
    const depth = die === undefined ? 1 : guide === undefined ? 2 : 3;
    const n = this.#states.length;
    const out = {
      share: Float64Array.from(this.#share),
      mean: new Float64Array(n),
      variance: new Float64Array(n),
    };
    const scratch = new Float64Array(this.#forest.columns);
    for (let k = 0; k < n; k++) this.#answer(this.#states[k]!, path, depth, row, scratch, k, out);
    return out;
  }

  #answer(
    state: State,
    { wafer, die, leaf }: Path,
    depth: number,
    row: readonly number[],
    at: Float64Array,
    k: number,
    out: { readonly mean: Float64Array; readonly variance: Float64Array },
  ): void {
    const { columns: q, rows, variance: readingVariance } = this.#forest;
    const [, waferVar, dieVar, guideVar] = state.variances;
    const [nodes, i] = depth > 1 && die >= 0
      ? [state.dies, die]
      : wafer >= 0
      ? [state.wafers, wafer]
      : [state.lot, 0];
    let v = nodes.variance[i]!;
    if (wafer < 0) v += waferVar;
    if (depth > 1 && die < 0) v += dieVar;
    let keep = 1;
    if (depth > 2 && leaf < 0) v += guideVar;
    else if (depth > 2) {
      keep = 1 / (1 + guideVar / readingVariance[leaf]!);
      v = guideVar * keep + keep * keep * v;
    }
    for (let c = 0; c < q; c++) {
      at[c] = keep * nodes.mean[i * q + c]! + (leaf < 0 ? 0 : (1 - keep) * rows[leaf * q + c]!);
    }
    const { estimate, covariance } = state.effects;
    const p = q - 1;
    let m = at[0]!;
    for (let a = 0; a < p; a++) {
      const da = row[a]! - at[a + 1]!;
      m += da * estimate[a]!;
      for (let b = 0; b < p; b++) v += da * (row[b]! - at[b + 1]!) * covariance[a * p + b]!;
    }
    out.mean[k] = m;
    out.variance[k] = v;
  }
}

/** Writes node `to` of `out` from the node above it and its own readings. */
function blend(
  above: Nodes,
  a: number,
  sums: NodeSums,
  s: number,
  own: number,
  out: Nodes,
  to: number,
  q: number,
): void {
  const keep = 1 / (1 + own * sums.weight[s]!);
  for (let c = 0; c < q; c++) {
    out.mean[to * q + c] = keep * above.mean[a * q + c]! + (1 - keep) * sums.mean[s * q + c]!;
  }
  out.variance[to] = own * keep + keep * keep * above.variance[a]!;
}
