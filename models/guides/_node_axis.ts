// Pure: no I/O, no clock, no hidden randomness.
// Interpolation on one axis, as weights on the nodes: linear in the data, so axes combine by products.
import { Matrix, solve } from "ml-matrix";

/** A value that differs from the end of an axis by rounding only still belongs to it. */
const ROUNDING = 1e-9;

/**
 * Clips rounding at the ends. `name` is the quantity with its unit, `scale` converts the axis to that unit.
 * @throws RangeError beyond the nodes, naming quantity and limits
 */
export function insideAxis(nodes: Float64Array, x: number, name: string, scale = 1): number {
  const lo = nodes[0]!;
  const hi = nodes[nodes.length - 1]!;
  const slack = ROUNDING * Math.max(Math.abs(lo), Math.abs(hi));
  if (!(x >= lo - slack && x <= hi + slack)) {
    const shown = (y: number) => Number((y * scale).toPrecision(12));
    const wanted = lo === hi
      ? `${shown(lo)} (the table has this value only)`
      : `${shown(lo)} to ${shown(hi)}`;
    throw new RangeError(`Cannot look up the table: found ${name} ${shown(x)}, need ${wanted}`);
  }
  return Math.min(Math.max(x, lo), hi);
}

/** Index k of the interval [nodes[k], nodes[k+1]] that holds x, by bisection; 0 for a single node. */
export function intervalOf(nodes: Float64Array, x: number): number {
  let lo = 0;
  let hi = nodes.length - 1;
  while (hi - lo > 1) {
    const middle = (lo + hi) >> 1;
    if (x >= nodes[middle]!) lo = middle;
    else hi = middle;
  }
  return lo;
}

/**
 * Second derivatives of the interpolating cubic spline at the nodes are S·values; this is S, row-major n × n.
 * Not-a-knot ends for 4 nodes and more (C. de Boor, A Practical Guide to Splines, ch. IV); the interpolating parabola,
 * line and constant for 3, 2 and 1.
 */
export function splineCurvatures(nodes: Float64Array): Float64Array {
  const n = nodes.length;
  const out = new Float64Array(n * n);
  if (n < 3) return out;
  const unit = (nodes[n - 1]! - nodes[0]!) / (n - 1); // keeps the equations free of the axis' unit
  const h = Array.from({ length: n - 1 }, (_, k) => (nodes[k + 1]! - nodes[k]!) / unit);
  if (n === 3) {
    const [a, b] = h as [number, number];
    const row = [2 / (a * (a + b)), -2 / (a * b), 2 / (b * (a + b))];
    for (let i = 0; i < 9; i++) out[i] = row[i % 3]! / (unit * unit);
    return out;
  }
  const left = Matrix.zeros(n, n);
  const right = Matrix.zeros(n, n);
  for (let i = 1; i < n - 1; i++) {
    const a = h[i - 1]!;
    const b = h[i]!;
    left.set(i, i - 1, a);
    left.set(i, i, 2 * (a + b));
    left.set(i, i + 1, b);
    right.set(i, i - 1, 6 / a);
    right.set(i, i, -6 / a - 6 / b);
    right.set(i, i + 1, 6 / b);
  }
  // The third derivative is continuous across the first and the last inner node.
  const closeEnd = (row: number, first: number, a: number, b: number) => {
    left.set(row, first, b);
    left.set(row, first + 1, -(a + b));
    left.set(row, first + 2, a);
  };
  closeEnd(0, 0, h[0]!, h[1]!);
  closeEnd(n - 1, n - 3, h[n - 3]!, h[n - 2]!);
  const solved = solve(left, right);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) out[i * n + j] = solved.get(i, j) / (unit * unit);
  }
  return out;
}

/** Weights of all nodes for the spline's value at x (inside the axis). */
export function splineWeights(nodes: Float64Array, curvatures: Float64Array, x: number): Float64Array {
  const n = nodes.length;
  const out = new Float64Array(n);
  if (n === 1) {
    out[0] = 1;
    return out;
  }
  const k = intervalOf(nodes, x);
  const h = nodes[k + 1]! - nodes[k]!;
  const b = (x - nodes[k]!) / h;
  const a = 1 - b;
  const c = a * (a * a - 1) * h * h / 6;
  const d = b * (b * b - 1) * h * h / 6;
  for (let j = 0; j < n; j++) out[j] = c * curvatures[k * n + j]! + d * curvatures[(k + 1) * n + j]!;
  out[k]! += a;
  out[k + 1]! += b;
  return out;
}

/** Weights on neighbouring nodes first, first + 1 … for a value or a derivative. */
export interface LocalWeights {
  readonly first: number;
  readonly weights: readonly number[];
}

/**
 * Cubic Hermite interpolation whose slope at each node is that of the parabola through it and its neighbours: local
 * (at most four nodes), continuous in value and slope, exact for parabolas. Two nodes: the line; one: constant.
 * `derivative` 0 gives the weights of the value, 1 those of the slope.
 */
export function hermiteWeights(nodes: Float64Array, x: number, derivative: 0 | 1): LocalWeights {
  const n = nodes.length;
  if (n === 1) return { first: 0, weights: [derivative === 0 ? 1 : 0] };
  const k = intervalOf(nodes, x);
  const h = nodes[k + 1]! - nodes[k]!;
  const t = (x - nodes[k]!) / h;
  if (n === 2) return { first: 0, weights: derivative === 0 ? [1 - t, t] : [-1 / h, 1 / h] };
  const first = Math.max(0, k - 1);
  const last = Math.min(n - 1, k + 2);
  const weights = new Array<number>(last - first + 1).fill(0);
  const [p0, p1, m0, m1] = derivative === 0
    ? [
      (1 + 2 * t) * (1 - t) * (1 - t),
      t * t * (3 - 2 * t),
      t * (1 - t) * (1 - t) * h,
      t * t * (t - 1) * h,
    ]
    : [6 * t * (t - 1) / h, 6 * t * (1 - t) / h, (1 - t) * (1 - 3 * t), t * (3 * t - 2)];
  weights[k - first]! += p0;
  weights[k + 1 - first]! += p1;
  addSlope(nodes, k, m0, first, weights);
  addSlope(nodes, k + 1, m1, first, weights);
  return { first, weights };
}

/** Adds factor × (slope at node k of the parabola through it and its neighbours; at an end, of the last three). */
function addSlope(nodes: Float64Array, k: number, factor: number, first: number, weights: number[]): void {
  const j = Math.min(Math.max(k, 1), nodes.length - 2); // middle of the three
  const a = nodes[j]! - nodes[j - 1]!;
  const b = nodes[j + 1]! - nodes[j]!;
  const x = nodes[k]! - nodes[j]!;
  weights[j - 1 - first]! += factor * (2 * x - b) / (a * (a + b));
  weights[j - first]! += factor * (b - a - 2 * x) / (a * b);
  weights[j + 1 - first]! += factor * (2 * x + a) / (b * (a + b));
}
