// Pure: no I/O, no clock, no hidden randomness.
import { mean } from "../../../shared/statistics.ts";
import { chartConstants } from "./chart_constants.ts";
import { baselineOf, type ChartOptions, type ControlChart, finishChart } from "./control_chart.ts";
import { WESTERN_ELECTRIC } from "./run_rules.ts";

export interface IndividualsCharts {
  readonly centre: number;
  /** Standard deviation from the mean moving range. */
  readonly sigma: number;
  readonly individuals: ControlChart;
  /** Judged by its upper limit alone: neighbouring ranges share a value, runs over them say nothing. */
  readonly movingRange: ControlChart;
}

/**
 * Charts of single values in the order of time (a lot's mean, say): centre = mean, sigma = mean moving range/d2(2)
 * (NIST/SEMATECH e-Handbook, 6.3.2.2), so that a step or a drift widens the limits less than it would through the standard
 * deviation. A NaN is left out, the values before and after it are neighbours. Default rules: Western Electric.
 * @param values in one unit; limits come out in it
 * @throws RangeError if fewer than 2 values carry the limits, or one is infinite
 */
export function individualsCharts(values: ArrayLike<number>, options: ChartOptions = {}): IndividualsCharts {
  const length = baselineOf(options, values.length);
  const ranges = movingRanges(values);
  const carried: number[] = [];
  for (let i = 0; i < values.length; i++) {
    if (Math.abs(values[i]!) === Infinity) {
      throw new RangeError(`Cannot chart value ${i}: found ${values[i]}, need a finite number or NaN`);
    }
    if (i < length && !Number.isNaN(values[i]!)) carried.push(values[i]!);
  }
  if (carried.length < 2) {
    throw new RangeError(`Cannot set limits from ${carried.length} values: need at least 2`);
  }
  const meanRange = mean(ranges.slice(0, length).filter((r) => !Number.isNaN(r)));
  const { d2, d3 } = chartConstants(2);
  const centre = mean(carried);
  const sigma = meanRange / d2;
  const individuals = finishChart({
    kind: "individuals",
    values,
    centre: () => centre,
    sigma: () => sigma,
    baseline: carried.length,
    rules: options.rules ?? WESTERN_ELECTRIC,
  });
  const movingRange = finishChart({
    kind: "moving_range",
    values: ranges,
    centre: () => meanRange,
    sigma: () => meanRange * d3 / d2,
    least: 0,
    baseline: carried.length - 1,
    rules: ["beyond_3s"],
  });
  return { centre, sigma, individuals, movingRange };
}

/** |difference| to the last value before it, per position; NaN at the first value and where there is none. */
function movingRanges(values: ArrayLike<number>): number[] {
  let last = NaN;
  const ranges: number[] = [];
  for (let i = 0; i < values.length; i++) {
    ranges.push(Math.abs(values[i]! - last));
    if (!Number.isNaN(values[i]!)) last = values[i]!;
  }
  return ranges;
}
