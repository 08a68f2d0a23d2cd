// Pure: no I/O, no clock, no hidden randomness.
import { type Filter, transmission } from "./filters.ts";
import type { ArmWindow, Band } from "./window.ts";

/** A stretch of an axis with equal steps. */
export interface Segment {
  readonly from: number;
  readonly to: number;
  /** Index of its first point, and number of points. */
  readonly first: number;
  readonly count: number;
  /** Part of the stated window. */
  readonly stated: boolean;
}

/** Midpoint grid of one arm, uniform in ω inside each segment, ascending. */
export interface Axis {
  /** rad/s */
  readonly omega: Float64Array;
  /** Width of each point's cell, rad/s. */
  readonly weight: Float64Array;
  /** Power transmission of the arm's filter inside the stated window; 0 outside it, 1 without filter. */
  readonly power: Float64Array;
  readonly segments: readonly Segment[];
  /** True if {@link MOST_POINTS} kept a step longer than was asked for: no result on this axis has converged. */
  readonly capped: boolean;
}

export interface AxisOptions {
  /** Points across the stated window. */
  readonly points: number;
  /** No step is longer than this (rad/s): a narrow pump must not fall between the points. */
  readonly longestStep?: number;
  /** Frequencies where a segment must end, rad/s. */
  readonly breaks?: readonly number[];
  /** Keep to these frequencies, rad/s. */
  readonly within?: Band;
}

/** Most points of one segment. */
export const MOST_POINTS = 1024;

/** Grid of an arm: its stated window, and beyond it what is left of its open window at the open window's step. */
export function armAxis(window: ArmWindow, filter: Filter | undefined, options: AxisOptions): Axis {
  const { points, longestStep = Infinity, breaks = [], within = [0, Infinity] } = options;
  const { stated, open } = window;
  const edges = [...new Set([open[0], stated[0], stated[1], open[1], ...breaks, ...within])]
    .filter((e) => e >= Math.max(open[0], within[0]) && e <= Math.min(open[1], within[1]))
    .sort((a, b) => a - b);
  const segments: Segment[] = [];
  let first = 0;
  let capped = false;
  for (let k = 1; k < edges.length; k++) {
    const from = edges[k - 1]!;
    const to = edges[k]!;
    const inside = from >= stated[0] && to <= stated[1];
    const [lo, hi] = inside ? stated : open;
    const step = Math.min((hi - lo) / points, longestStep);
    // the small slack keeps rounding from adding a point
    const wanted = Math.max(Math.ceil((to - from) / step - 1e-9), 1);
    const count = Math.min(wanted, MOST_POINTS);
    // what is asked for has some reserve: see STEPS_PER_PUMP
    if (1.5 * count < wanted) capped = true;
    segments.push({ from, to, first, count, stated: inside });
    first += count;
  }
  return fill(segments, first, filter, capped);
}

/** One uniform grid over `band`; a cell that the stated window covers in part transmits that part. */
export function commonAxis(band: Band, points: number, window: ArmWindow, filter: Filter | undefined): Axis {
  const axis = fill(
    [{ from: band[0], to: band[1], first: 0, count: points, stated: true }],
    points,
    filter,
    false,
  );
  const { stated } = window;
  axis.omega.forEach((w, k) => {
    const width = axis.weight[k]!;
    const [from, to] = [Math.max(w - width / 2, stated[0]), Math.min(w + width / 2, stated[1])];
    if (!(to > from)) axis.power[k] = 0;
    else if (to - from < width * (1 - 1e-9)) {
      const t = filter === undefined ? 1 : transmission(filter, (from + to) / 2);
      axis.power[k] = t * (to - from) / width;
    }
  });
  return axis;
}

function fill(
  segments: readonly Segment[],
  total: number,
  filter: Filter | undefined,
  capped: boolean,
): Axis {
  const omega = new Float64Array(total);
  const weight = new Float64Array(total);
  const power = new Float64Array(total);
  for (const { from, to, first, count, stated } of segments) {
    const step = (to - from) / count;
    for (let k = 0; k < count; k++) {
      omega[first + k] = from + (k + 0.5) * step;
      weight[first + k] = step;
      if (stated) power[first + k] = filter === undefined ? 1 : transmission(filter, omega[first + k]!);
    }
  }
  return { omega, weight, power, segments, capped };
}
