// Pure: no I/O, no clock, no hidden randomness.
import type { Forest } from "./forest.ts";
import type { Asked } from "./lot_fit.ts";
import type { NodeSums, Sweep, Variances } from "./sweep.ts";

/**
 * Where an estimate comes from: the weight that the readings of each level have in it, nearest first; each level without
 * the nearer ones. They sum to 1.
 */
export interface InformationShares {
  /** Readings of the guide itself. */
  readonly own: number;
  /** Readings of its die, but not its own; and so on outwards. */
  readonly die: number;
  readonly wafer: number;
  readonly lot: number;
  /** Readings of other lots. */
  readonly lots: number;
  /** The platform's default. */
  readonly prior: number;
}

/**
 * Shares at one set of variances: how far the estimate moves when all readings of a level move by one unit. Differences
 * between widths and trends over the wafer are taken as known.
 * @param priorPrecision of the mean over everything; 0 without a default
 */
export function informationShares(
  forest: Forest,
  sweep: Sweep,
  variances: Variances,
  priorPrecision: number,
  asked: Asked,
): InformationShares {
  const [lotVar, waferVar, dieVar, guideVar] = variances;
  const l = forest.lots.indexOf(asked.lot);
  const w = within(forest.wafers, forest.firstWafer, l, asked.wafer);
  const d = within(forest.dies, forest.firstDie, w, asked.die);
  const k = leafOf(forest, d, asked.guide);
  let all = 0;
  for (const x of sweep.lots.lifted) all += x;
  const keep = (sums: NodeSums, i: number, own: number) => i < 0 ? 1 : 1 / (1 + own * sums.weight[i]!);
  const path = {
    lot: { keep: keep(sweep.lots, l, lotVar), lifted: l < 0 ? 0 : sweep.lots.lifted[l]! },
    wafer: { keep: keep(sweep.wafers, w, waferVar), lifted: w < 0 ? 0 : sweep.wafers.lifted[w]! },
    die: { keep: keep(sweep.dies, d, dieVar), lifted: d < 0 ? 0 : sweep.dies.lifted[d]! },
    guide: {
      keep: k < 0 ? 1 : 1 / (1 + guideVar / forest.variance[k]!),
      lifted: k < 0 ? 0 : sweep.leafWeight[k]!,
    },
  };
  // How far each node's own mean moves: first the share of the moving readings in it, then the walk from the top down.
  const answer = (moving: "guide" | "die" | "wafer" | "lot"): number => {
    const guide = k < 0 ? 0 : 1;
    const die = d < 0 ? 0 : moving === "guide" ? guide * path.guide.lifted / sweep.dies.weight[d]! : 1;
    const wafer = w < 0
      ? 0
      : moving === "guide" || moving === "die"
      ? die * path.die.lifted / sweep.wafers.weight[w]!
      : 1;
    const lot = l < 0 ? 0 : moving === "lot" ? 1 : wafer * path.wafer.lifted / sweep.lots.weight[l]!;
    const top = lot * path.lot.lifted / (priorPrecision + all);
    let at = path.lot.keep * top + (1 - path.lot.keep) * lot;
    at = path.wafer.keep * at + (1 - path.wafer.keep) * wafer;
    at = path.die.keep * at + (1 - path.die.keep) * die;
    return path.guide.keep * at + (1 - path.guide.keep) * guide;
  };
  const [own, die, wafer, lot] = [answer("guide"), answer("die"), answer("wafer"), answer("lot")];
  // What no reading moves is the default's; it reaches the guide through every level that keeps what is above it.
  const prior = path.lot.keep * path.wafer.keep * path.die.keep * path.guide.keep * priorPrecision /
    (priorPrecision + all);
  return { own, die: die - own, wafer: wafer - die, lot: lot - wafer, lots: 1 - prior - lot, prior };
}

function within<T>(ids: readonly T[], first: Int32Array, parent: number, id: T | undefined): number {
  if (parent < 0 || id === undefined) return -1;
  for (let i = first[parent]!; i < first[parent + 1]!; i++) if (ids[i] === id) return i;
  return -1;
}

function leafOf(forest: Forest, die: number, guide: string | undefined): number {
  if (die < 0 || guide === undefined) return -1;
  for (let k = forest.firstLeaf[die]!; k < forest.firstLeaf[die + 1]!; k++) {
    if (forest.leaves[k]!.guide === guide) return k;
  }
  return -1;
}
