// Pure: no I/O, no clock, no hidden randomness.
import { type RunRule, runSignals, type Signal } from "./run_rules.ts";

export type ChartKind =
  | "individuals"
  | "moving_range"
  | "mean"
  | "range"
  | "deviation"
  | "ewma"
  | "share"
  | "count";

export interface ChartPoint {
  /** Value on the chart; NaN where there was none. */
  readonly value: number;
  readonly centre: number;
  /** Three-sigma limits, cut at the least (and for a share the greatest) possible value. */
  readonly lower: number;
  readonly upper: number;
  /** (value − centre)/sigma of this point; NaN where there is no value or no spread to measure with. */
  readonly z: number;
}

export interface ControlChart {
  readonly kind: ChartKind;
  readonly points: readonly ChartPoint[];
  readonly signals: readonly Signal[];
  /** Points or groups that centre and limits rest on; 0 when both were given. */
  readonly baseline: number;
  /** Sentences that the reader of the chart needs. */
  readonly remarks: readonly string[];
}

/** How a chart is set up. */
export interface ChartOptions {
  /** Rules to apply; the default is the chart's own. */
  readonly rules?: readonly RunRule[];
  /** Centre and limits rest on the points before this position (default: all). Later points are judged by them. */
  readonly baseline?: number;
}

/** Limits from fewer points or groups are provisional (common practice, no source). */
export const ADVISED_BASELINE = 20;

/** How many leading points carry the limits. @throws RangeError unless it is an integer in 1…`count` */
export function baselineOf(options: ChartOptions, count: number): number {
  const baseline = options.baseline ?? count;
  if (!Number.isSafeInteger(baseline) || baseline < Math.min(1, count) || baseline > count) {
    throw new RangeError(`Cannot rest limits on ${baseline} points: need an integer in 1…${count}`);
  }
  return baseline;
}

/** A chart before its rules are applied: per point a value, a centre and its own sigma. */
export interface ChartDraft {
  readonly kind: ChartKind;
  readonly values: ArrayLike<number>;
  readonly centre: (i: number) => number;
  readonly sigma: (i: number) => number;
  readonly least?: number;
  readonly greatest?: number;
  readonly baseline: number;
  readonly rules: readonly RunRule[];
  readonly remarks?: readonly string[];
}

/** Points, limits and signals of a drafted chart. */
export function finishChart(draft: ChartDraft): ControlChart {
  const points: ChartPoint[] = [];
  let spreadless = false;
  for (let i = 0; i < draft.values.length; i++) {
    const value = draft.values[i]!;
    const centre = draft.centre(i);
    const given = draft.sigma(i);
    // A spread of rounding errors is none: limits from it would call every point out.
    const sigma = given > 1e-12 * Math.abs(centre) ? given : 0;
    if (sigma === 0) spreadless = true;
    points.push({
      value,
      centre,
      lower: Math.max(draft.least ?? -Infinity, centre - 3 * sigma),
      upper: Math.min(draft.greatest ?? Infinity, centre + 3 * sigma),
      z: sigma > 0 ? (value - centre) / sigma : NaN,
    });
  }
  const remarks = [...draft.remarks ?? []];
  if (spreadless) remarks.push("The values behind the limits do not differ: no point can be judged");
  if (draft.baseline > 0 && draft.baseline < ADVISED_BASELINE) {
    remarks.push(
      `The limits rest on ${draft.baseline} points and are provisional: ${ADVISED_BASELINE} are advised`,
    );
  }
  const signals = runSignals(points.map((p) => p.z), draft.rules);
  return { kind: draft.kind, points, signals, baseline: draft.baseline, remarks };
}
