// Pure: no I/O, no clock, no hidden randomness.
import { mean, quantileOfSorted, standardDeviation } from "../../shared/statistics.ts";

/** A figure's distribution over draws: NaN marks a draw in which the figure does not exist. */
export interface Summary {
  readonly mean: number;
  readonly u: number;
  /** 2.5 % and 97.5 % quantiles. */
  readonly lo: number;
  readonly hi: number;
  /** Draws in which the figure exists, of all. */
  readonly valid: number;
  readonly count: number;
}

/** Mean, standard uncertainty and 95 % coverage interval of draws (JCGM 101:2008, 7.6 and 7.7); null when no draw has a value. */
export function summarise(draws: Float64Array): Summary | null {
  const values = draws.filter((x) => !Number.isNaN(x)).sort();
  if (values.length === 0) return null;
  const [least, most] = [values[0]!, values[values.length - 1]!];
  // Equal draws: the mean of many equal numbers is off by rounding, and their spread with it.
  if (least === most) {
    return { mean: least, u: 0, lo: least, hi: least, valid: values.length, count: draws.length };
  }
  return {
    mean: mean(values),
    u: standardDeviation(values),
    lo: quantileOfSorted(values, 0.025),
    hi: quantileOfSorted(values, 0.975),
    valid: values.length,
    count: draws.length,
  };
}

/** Limits on a figure; ±Infinity where there is none. */
export interface Limits {
  readonly atLeast: number;
  readonly atMost: number;
}

/** Per draw, 1 where the value exists and lies within the limits (both included). */
export function meets(draws: Float64Array, limits: Limits): Uint8Array {
  return Uint8Array.from(draws, (x) => x >= limits.atLeast && x <= limits.atMost ? 1 : 0);
}

/** What the requirements of a request say about a guide. */
export interface Conformity {
  /** Share of draws that meet every requirement: the probability of conformity (JCGM 106:2012, 7). */
  readonly joint: number;
  /** Per requirement, the share of draws that meet it. */
  readonly each: readonly number[];
  /** Position of the requirement least often met, null without requirements or when all are always met. */
  readonly limiting: number | null;
}

/**
 * Joint and single probabilities of conformity.
 * @param met per requirement the result of {@link meets}
 * @param exists per draw, 1 where the guide has an operating point: without one a draw fails the request
 */
export function conformity(met: readonly Uint8Array[], exists: Uint8Array): Conformity {
  const n = exists.length;
  let both = 0;
  for (let k = 0; k < n; k++) {
    if (exists[k] === 1 && met.every((m) => m[k] === 1)) both++;
  }
  const each = met.map((m) => m.reduce((sum, x) => sum + x, 0) / n);
  const least = each.reduce((best, p, i) => p < each[best]! ? i : best, 0);
  return { joint: both / n, each, limiting: each.length > 0 && each[least]! < 1 ? least : null };
}

export type Decision = "accept" | "hold" | "reject";

/** accept at or above `acceptAt`, reject below `rejectBelow`, hold between (guarded decision rules: JCGM 106:2012, 8). */
export function decide(probability: number, thresholds: { acceptAt: number; rejectBelow: number }): Decision {
  if (probability >= thresholds.acceptAt) return "accept";
  return probability < thresholds.rejectBelow ? "reject" : "hold";
}
