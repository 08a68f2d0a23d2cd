// Pure: no I/O, no clock, no hidden randomness.
// Graded nodes along one axis, made so that every refinement halves each step of the same smooth map.

/** What holds at an end of an axis: the field is 0 there, or the axis is a mirror (the slope is 0 there). */
export type AxisEnd = "zero" | "mirror";

/** Ascending nodes (m) with both ends among them. */
export interface Axis {
  readonly nodes: Float64Array;
  readonly low: AxisEnd;
  readonly high: AxisEnd;
}

/**
 * A stretch of an axis, from its dense end to its far end (m; far may lie below dense). Places are
 * dense ± scale·sinh(u·asinh(length/scale)) at even u: even steps over about `scale`, growing in proportion beyond.
 */
export interface Segment {
  readonly dense: number;
  readonly far: number;
  readonly cells: number;
  /** m; Infinity: even steps throughout. */
  readonly scale: number;
}

/**
 * Nodes of adjoining segments, given in ascending order, each of its cells split into `refine`.
 * @throws RangeError for segments that do not adjoin, or without cells
 */
export function gradedNodes(segments: readonly Segment[], refine = 1): Float64Array {
  const nodes: number[] = [];
  for (const { dense, far, cells, scale } of segments) {
    const count = cells * refine;
    if (!(Number.isSafeInteger(count) && count > 0 && dense !== far && scale > 0)) {
      throw new RangeError(
        `Cannot grade an axis from ${dense} m to ${far} m: found ${cells} cells, scale ${scale} m, need > 0`,
      );
    }
    const length = Math.abs(far - dense);
    const span = Math.asinh(length / scale);
    const place = (u: number) => {
      if (u === 1) return far;
      return dense + Math.sign(far - dense) * (scale === Infinity ? length * u : scale * Math.sinh(u * span));
    };
    const own = Array.from({ length: count + 1 }, (_, k) => place(k / count));
    if (far < dense) own.reverse();
    if (nodes.length > 0) {
      if (nodes[nodes.length - 1] !== own[0]) {
        throw new RangeError(`Cannot join segments: found ${nodes[nodes.length - 1]} m and ${own[0]} m`);
      }
      own.shift();
    }
    for (const x of own) nodes.push(x); // not spread: the list may be long
  }
  return Float64Array.from(nodes);
}

/** Length that belongs to each node: half of the cells beside it, m. */
export function nodeWeights(nodes: Float64Array): Float64Array {
  const out = new Float64Array(nodes.length);
  for (let k = 0; k + 1 < nodes.length; k++) {
    const half = (nodes[k + 1]! - nodes[k]!) / 2;
    out[k]! += half;
    out[k + 1]! += half;
  }
  return out;
}

/** Whether the field at a node is an unknown: all but the ends where it is 0. */
export function unknownRange({ nodes, low, high }: Axis): { first: number; count: number } {
  const first = low === "zero" ? 1 : 0;
  const last = nodes.length - (high === "zero" ? 1 : 0);
  return { first, count: last - first };
}

/** Areas of the nodes of both axes, as weights for sums over the whole grid: x running fastest, m². */
export function areaWeights(x: Pick<Axis, "nodes">, y: Pick<Axis, "nodes">): Float64Array {
  const wx = nodeWeights(x.nodes);
  const wy = nodeWeights(y.nodes);
  const out = new Float64Array(wx.length * wy.length);
  for (let j = 0; j < wy.length; j++) {
    for (let i = 0; i < wx.length; i++) out[j * wx.length + i] = wx[i]! * wy[j]!;
  }
  return out;
}
