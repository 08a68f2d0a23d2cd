// Pure: no I/O, no clock, no hidden randomness.
import { weightedMean } from "../../shared/statistics.ts";
import type { Observation } from "./inherit.ts";

/** A reading of any lot: pooling learns from all of them. */
export interface LotObservation extends Observation {
  readonly lot: string;
}

/** Nesting of the effects, widest first. Arrays of four numbers in this order go by "levels". */
export const LEVELS = ["lot", "wafer", "die", "guide"] as const;
export type Level = typeof LEVELS[number];

/** What is read of one unit, its readings joined: a guide, or a whole die or wafer. */
export interface Leaf {
  readonly lot: string;
  readonly wafer: string;
  readonly die?: string;
  readonly guide?: string;
  readonly widthUm?: number;
  readonly value: number;
  /** Variance of the joined readings. */
  readonly variance: number;
  /** Positions in the list of observations. */
  readonly members: readonly number[];
}

/**
 * Joins the readings of each unit. A reading without an error would leave nothing to weigh: variances are not taken
 * below (1e−6 · `scale`)².
 * @param without positions of observations to leave out
 */
export function leavesOf(
  observations: readonly LotObservation[],
  scale: number,
  without: ReadonlySet<number> = new Set(),
): Leaf[] {
  const units = new Map<string, number[]>();
  observations.forEach((o, k) => {
    if (without.has(k)) return;
    // Readings of a whole die may be of guides of one width: those of another width are another unit.
    const key = o.guide ?? `${o.die ?? o.wafer}|${o.widthUm ?? ""}`;
    const held = units.get(key);
    if (held === undefined) units.set(key, [k]);
    else held.push(k);
  });
  const least = (1e-6 * scale) ** 2;
  return [...units.values()].map((members) => {
    const { lot, wafer, die, guide, widthUm } = observations[members[0]!]!;
    const joined = weightedMean(members.map((k) => observations[k]!));
    return {
      lot,
      wafer,
      ...(die === undefined ? {} : { die }),
      ...(guide === undefined ? {} : { guide }),
      ...(widthUm === undefined ? {} : { widthUm }),
      value: joined.value,
      variance: Math.max(joined.u ** 2, least),
      members,
    };
  });
}

/**
 * Leaves in the order of their nesting, flat. The children of node i of one level are the nodes first[i] … first[i+1]−1
 * of the next. Every leaf carries a row of `columns` numbers: its value, then the row of the design matrix.
 * A reading of a whole wafer hangs under a die of its own that has no die effect.
 */
export interface Forest {
  readonly columns: number;
  readonly leaves: readonly Leaf[];
  readonly lots: readonly string[];
  readonly wafers: readonly string[];
  /** Ids of dies; null for the stand-in of a wafer's own readings. */
  readonly dies: readonly (string | null)[];
  readonly firstWafer: Int32Array;
  readonly firstDie: Int32Array;
  readonly firstLeaf: Int32Array;
  /** Per leaf: variance of its readings. */
  readonly variance: Float64Array;
  /** Per leaf, 1 where it is a guide, whose own effect it carries. */
  readonly isGuide: Uint8Array;
  /** Row-major: leaf k's row starts at k · columns. */
  readonly rows: Float64Array;
}

/** @param rowOf a leaf's row: value and design, `columns` numbers */
export function forestOf(
  leaves: readonly Leaf[],
  columns: number,
  rowOf: (leaf: Leaf) => readonly number[],
): Forest {
  const tree = new Map<string, Map<string, Map<string | null, Leaf[]>>>();
  for (const leaf of leaves) {
    const wafers = at(tree, leaf.lot, () => new Map<string, Map<string | null, Leaf[]>>());
    const dies = at(wafers, leaf.wafer, () => new Map<string | null, Leaf[]>());
    at(dies, leaf.die ?? null, () => [] as Leaf[]).push(leaf);
  }
  const ordered: Leaf[] = [];
  const lots: string[] = [];
  const wafers: string[] = [];
  const dies: (string | null)[] = [];
  const firstWafer: number[] = [];
  const firstDie: number[] = [];
  const firstLeaf: number[] = [];
  for (const [lot, ofLot] of tree) {
    firstWafer.push(wafers.length);
    lots.push(lot);
    for (const [wafer, ofWafer] of ofLot) {
      firstDie.push(dies.length);
      wafers.push(wafer);
      for (const [die, ofDie] of ofWafer) {
        firstLeaf.push(ordered.length);
        dies.push(die);
        ordered.push(...ofDie);
      }
    }
  }
  const rows = new Float64Array(ordered.length * columns);
  ordered.forEach((leaf, k) => rows.set(rowOf(leaf), k * columns));
  return {
    columns,
    leaves: ordered,
    lots,
    wafers,
    dies,
    firstWafer: Int32Array.from([...firstWafer, wafers.length]),
    firstDie: Int32Array.from([...firstDie, dies.length]),
    firstLeaf: Int32Array.from([...firstLeaf, ordered.length]),
    variance: Float64Array.from(ordered, (leaf) => leaf.variance),
    isGuide: Uint8Array.from(ordered, (leaf) => leaf.guide === undefined ? 0 : 1),
    rows,
  };
}

function at<K, V>(map: Map<K, V>, key: K, make: () => V): V {
  let held = map.get(key);
  if (held === undefined) map.set(key, held = make());
  return held;
}
