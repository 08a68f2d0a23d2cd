// Pure: no I/O, no clock, no hidden randomness.
import { mean } from "../../../shared/statistics.ts";
import { chartConstants } from "./chart_constants.ts";
import { baselineOf, type ChartOptions, type ControlChart, finishChart } from "./control_chart.ts";

export interface CountChart {
  readonly centre: number;
  /** Spread of the points over what pure counting gives; 1 unless it was asked for. */
  readonly dispersion: number;
  readonly chart: ControlChart;
}

export interface CountOptions extends ChartOptions {
  /**
   * Widen the limits by the spread found between neighbouring points, where it exceeds counting (D. B. Laney,
   * Qual. Eng. 14, 531 (2002)). Needed where the units of one lot share their fate, as dies of a wafer do: counted as
   * independent, large lots are nearly all out.
   */
  readonly measuredDispersion?: boolean;
}

/**
 * Chart of shares (p chart): `counts[i]` of `sizes[i]` units in the order of time. Only single points are judged
 * unless rules are given. A point with size 0 is missing.
 * @throws RangeError for a count that is no integer in 0…size, or no unit behind the limits
 */
export function shareChart(
  counts: ArrayLike<number>,
  sizes: ArrayLike<number>,
  options: CountOptions = {},
): CountChart {
  for (let i = 0; i < counts.length; i++) {
    const [k, n] = [counts[i]!, sizes[i]!];
    if (!Number.isSafeInteger(k) || !Number.isSafeInteger(n) || k < 0 || k > n) {
      throw new RangeError(
        `Cannot chart point ${i}: found ${k} of ${n}, need integers with 0 <= count <= size`,
      );
    }
  }
  const chart = countChart(counts, sizes, options, "share", (p) => p * (1 - p), 1);
  const least = Array.from(sizes).filter((n) => n > 0)
    .reduce((low, n) => Math.min(low, n * Math.min(chart.centre, 1 - chart.centre)), Infinity);
  return least < 5 && least > 0 ? remarked(chart, least) : chart;
}

/**
 * Chart of counts without an upper bound, defects say (c chart; with unequal `sizes`, an area say, the chart of
 * counts per unit of size, or u chart). Only single points are judged unless rules are given.
 * @throws RangeError for a count that is no integer ≥ 0, a size that is not ≥ 0, or nothing behind the limits
 */
export function defectChart(
  counts: ArrayLike<number>,
  sizes: ArrayLike<number> = Array.from(counts, () => 1),
  options: CountOptions = {},
): CountChart {
  for (let i = 0; i < counts.length; i++) {
    const [k, n] = [counts[i]!, sizes[i]!];
    if (!Number.isSafeInteger(k) || k < 0 || !(n >= 0 && n < Infinity) || (n === 0 && k > 0)) {
      throw new RangeError(
        `Cannot chart point ${i}: found ${k} on a size of ${n}, need an integer >= 0 on a size > 0`,
      );
    }
  }
  const chart = countChart(counts, sizes, options, "count", (rate) => rate, Infinity);
  const least = Array.from(sizes).filter((n) => n > 0)
    .reduce((low, n) => Math.min(low, n * chart.centre), Infinity);
  return least < 5 && least > 0 ? remarked(chart, least) : chart;
}

function remarked(chart: CountChart, least: number): CountChart {
  const remark =
    `Limits are those of a normal distribution, but a point expects only ${least.toPrecision(2)} ` +
    "units of the rarer kind: false alarms are more frequent than the limits promise";
  return { ...chart, chart: { ...chart.chart, remarks: [...chart.chart.remarks, remark] } };
}

function countChart(
  counts: ArrayLike<number>,
  sizes: ArrayLike<number>,
  options: CountOptions,
  kind: "share" | "count",
  variance: (centre: number) => number,
  greatest: number,
): CountChart {
  if (counts.length !== sizes.length) {
    throw new RangeError(
      `Cannot chart ${counts.length} counts on ${sizes.length} sizes: need as many of both`,
    );
  }
  const length = baselineOf(options, counts.length);
  let [total, size, points] = [0, 0, 0];
  for (let i = 0; i < length; i++) {
    total += counts[i]!;
    size += sizes[i]!;
    if (sizes[i]! > 0) points++;
  }
  if (!(size > 0)) {
    throw new RangeError("Cannot set limits from a total size of 0: need at least one counted point");
  }
  const centre = total / size;
  const counting = (i: number) => sizes[i]! > 0 ? Math.sqrt(variance(centre) / sizes[i]!) : NaN;
  const values = Array.from(counts, (k, i) => sizes[i]! > 0 ? k / sizes[i]! : NaN);
  const dispersion = options.measuredDispersion ? dispersionOf(values, centre, counting, length) : 1;
  const chart = finishChart({
    kind,
    values,
    centre: () => centre,
    sigma: (i) => dispersion * counting(i),
    least: 0,
    greatest,
    baseline: points,
    rules: options.rules ?? ["beyond_3s"],
  });
  return { centre, dispersion, chart };
}

/** Mean moving range of the standardised points over d2(2), not below 1: counting is the least spread there is. */
function dispersionOf(
  values: readonly number[],
  centre: number,
  counting: (i: number) => number,
  length: number,
): number {
  const z = values.slice(0, length).map((v, i) => (v - centre) / counting(i)).filter((x) => !Number.isNaN(x));
  if (z.length < 2) return 1;
  const ranges = z.slice(1).map((x, i) => Math.abs(x - z[i]!));
  return Math.max(1, mean(ranges) / chartConstants(2).d2);
}
