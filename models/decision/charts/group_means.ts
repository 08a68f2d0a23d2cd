// Pure: no I/O, no clock, no hidden randomness.
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import { chartConstants, meanOfStandardDeviation, relativeSpreadOfDeviation } from "./chart_constants.ts";
import { baselineOf, type ChartOptions, type ControlChart, finishChart } from "./control_chart.ts";
import { WESTERN_ELECTRIC } from "./run_rules.ts";

export interface GroupCharts {
  readonly centre: number;
  /** Standard deviation inside the groups. */
  readonly sigma: number;
  readonly means: ControlChart;
  /** Ranges or standard deviations of the groups, judged by their limits alone. */
  readonly spreads: ControlChart;
}

/** How the spread of a group is measured. */
export type SpreadMeasure = "range" | "deviation";

/**
 * Charts of group means with the ranges (X-bar and R) or standard deviations (X-bar and s) of the groups, in the
 * order of time. The limits of the means come from the spread *inside* the groups: they promise their false-alarm
 * rate only where the mean of a group differs from the next by nothing else. Where lots differ by nature, chart their
 * means as individuals.
 *
 * Groups may differ in size. Then sigma is the mean of the groups' own estimates with weights of least variance (I.
 * W. Burr, J. Quality Technol. 1, 163 (1969), from memory), which for equal sizes is mean range/d2 or mean s/c4; the
 * centre is the mean of all values. NaN values are left out; a group without values is no point, one with a single
 * value no spread.
 * @throws RangeError if no group behind the limits has 2 values, or a range is asked of more than 100
 */
export function groupCharts(
  groups: readonly ArrayLike<number>[],
  measure: SpreadMeasure,
  options: ChartOptions = {},
): GroupCharts {
  const length = baselineOf(options, groups.length);
  const kept = groups.map((g) => Array.from(g).filter((x) => !Number.isNaN(x)));
  const wrong = kept.flat().find((x) => Math.abs(x) === Infinity);
  if (wrong !== undefined) {
    throw new RangeError(`Cannot chart groups: found ${wrong}, need finite numbers or NaN`);
  }
  const spreads = kept.map((g) => g.length < 2 ? NaN : measure === "range" ? range(g) : standardDeviation(g));
  const factors = kept.map((g) =>
    g.length < 2 ? { mean: NaN, relative: NaN } : spreadFactors(g.length, measure)
  );

  const carried = kept.slice(0, length);
  let [weights, weighted, groupsUsed] = [0, 0, 0];
  for (let i = 0; i < length; i++) {
    if (kept[i]!.length < 2) continue;
    const w = 1 / factors[i]!.relative ** 2;
    weights += w;
    weighted += w * spreads[i]! / factors[i]!.mean;
    groupsUsed++;
  }
  if (groupsUsed === 0) {
    throw new RangeError("Cannot set limits from 0 groups of 2 or more values: need at least 1");
  }
  const sigma = weighted / weights;
  const centre = mean(carried.flat());
  const means = finishChart({
    kind: "mean",
    values: kept.map(mean),
    centre: () => centre,
    sigma: (i) => sigma / Math.sqrt(kept[i]!.length),
    baseline: carried.filter((g) => g.length > 0).length,
    rules: options.rules ?? WESTERN_ELECTRIC,
  });
  const spreadChart = finishChart({
    kind: measure,
    values: spreads,
    centre: (i) => sigma * factors[i]!.mean,
    sigma: (i) => sigma * factors[i]!.mean * factors[i]!.relative,
    least: 0,
    baseline: groupsUsed,
    rules: ["beyond_3s"],
  });
  return { centre, sigma, means, spreads: spreadChart };
}

/** Mean of a spread over sigma, and its standard deviation over that mean. */
function spreadFactors(n: number, measure: SpreadMeasure): { mean: number; relative: number } {
  if (measure === "deviation") {
    return { mean: meanOfStandardDeviation(n), relative: relativeSpreadOfDeviation(n) };
  }
  const { d2, d3 } = chartConstants(n);
  return { mean: d2, relative: d3 / d2 };
}

function range(x: readonly number[]): number {
  return x.reduce((a, b) => Math.max(a, b), -Infinity) - x.reduce((a, b) => Math.min(a, b), Infinity);
}
