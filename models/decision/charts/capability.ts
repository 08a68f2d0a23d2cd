// Pure: no I/O, no clock, no hidden randomness.
import chiSquaredQuantile from "@stdlib/stats-base-dists-chisquare-quantile";
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import normalQuantile from "@stdlib/stats-base-dists-normal-quantile";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import { checkShare } from "../tails.ts";

/** Specification limits in the unit of the values; at least one, and a target only with reason. */
export interface Specification {
  readonly lower?: number;
  readonly upper?: number;
  readonly target?: number;
}

/** An estimate with the two-sided interval of the confidence asked for. */
export interface Bounded {
  readonly value: number;
  readonly lo: number;
  readonly hi: number;
}

export interface Capability {
  readonly n: number;
  readonly mean: number;
  readonly s: number;
  readonly confidence: number;
  /** (upper − lower)/6s; null with one limit. */
  readonly cp: Bounded | null;
  /** (mean − lower)/3s and (upper − mean)/3s; null without that limit. */
  readonly cpl: number | null;
  readonly cpu: number | null;
  /** The smaller of cpl and cpu. */
  readonly cpk: Bounded;
  /** One-sided lower confidence bound of cpk. */
  readonly cpkAtLeast: number;
  /** (upper − lower)/(6·√(s² + (mean − target)²)); null with one limit or no target. */
  readonly cpm: Bounded | null;
  /** Share of a normal distribution outside the limits. */
  readonly outside: number;
}

/** A capability that was not computed, and why. */
export interface NoCapability {
  readonly refused: string;
}

/** Fewer values say next to nothing: at 10 the 95 % interval of a cpk of 1.33 still spans a factor of 2.9. */
export const LEAST_CAPABILITY_VALUES = 10;

/**
 * Process capability of normal values against limits, with confidence intervals: cp by chi-squared, cpk by A. F. Bissell,
 * Appl. Stat. 39, 331 (1990), cpm by R. A. Boyles, J. Quality Technol. 23, 17 (1991). NaN values are left out.
 * @throws RangeError for limits that are missing, not finite or in the wrong order
 */
export function capability(
  values: ArrayLike<number>,
  specification: Specification,
  confidence = 0.95,
): Capability | NoCapability {
  const kept = Array.from(values).filter((x) => !Number.isNaN(x));
  return capabilityOf(
    { n: kept.length, mean: mean(kept), s: standardDeviation(kept) },
    specification,
    confidence,
  );
}

/**
 * The same from a count, a mean and a standard deviation. `s` from ranges is allowed (the short-term capability); the
 * intervals take it as known as well as the standard deviation of `n` values.
 */
export function capabilityOf(
  sample: { readonly n: number; readonly mean: number; readonly s: number },
  specification: Specification,
  confidence = 0.95,
): Capability | NoCapability {
  checkShare(confidence, "confidence");
  checkSpecification(specification);
  const { n, mean: centre, s } = sample;
  if (!(n >= LEAST_CAPABILITY_VALUES)) {
    return {
      refused: `capability needs at least ${LEAST_CAPABILITY_VALUES} values, found ${
        Number(n.toPrecision(3))
      }`,
    };
  }
  if (!(s > 1e-12 * Math.abs(centre)) || !Number.isFinite(centre) || s === Infinity) {
    return { refused: "capability needs values that differ and are finite" };
  }
  const { lower, upper, target } = specification;
  const cpl = lower === undefined ? null : (centre - lower) / (3 * s);
  const cpu = upper === undefined ? null : (upper - centre) / (3 * s);
  const cpk = Math.min(cpl ?? Infinity, cpu ?? Infinity);
  const z = (level: number) => normalQuantile(level, 0, 1);
  // Bissell's standard error, written so that it also holds for a mean outside the limits.
  const error = Math.sqrt(1 / (9 * n) + cpk * cpk / (2 * (n - 1)));
  const half = z((1 + confidence) / 2) * error;
  const both = lower !== undefined && upper !== undefined;
  const off = target === undefined ? NaN : (centre - target) / s;
  return {
    n,
    mean: centre,
    s,
    confidence,
    cp: both ? chiBounded((upper - lower) / (6 * s), n - 1, confidence) : null,
    cpl,
    cpu,
    cpk: { value: cpk, lo: cpk - half, hi: cpk + half },
    cpkAtLeast: cpk - z(confidence) * error,
    cpm: both && target !== undefined
      ? chiBounded(
        (upper - lower) / (6 * s * Math.sqrt(1 + off * off)),
        n * (1 + off * off) ** 2 / (1 + 2 * off * off),
        confidence,
      )
      : null,
    outside: (cpl === null ? 0 : normalCdf(-3 * cpl, 0, 1)) + (cpu === null ? 0 : normalCdf(-3 * cpu, 0, 1)),
  };
}

/** An index ∝ 1/s with the interval from s²·df/σ² ~ chi-squared. */
function chiBounded(value: number, df: number, confidence: number): Bounded {
  const at = (level: number) => value * Math.sqrt(chiSquaredQuantile(level, df) / df);
  return { value, lo: at((1 - confidence) / 2), hi: at((1 + confidence) / 2) };
}

function checkSpecification({ lower, upper, target }: Specification): void {
  const given = [lower, upper, target].filter((x) => x !== undefined);
  if ((lower === undefined && upper === undefined) || !given.every(Number.isFinite)) {
    throw new RangeError(
      `Cannot judge capability within ${lower}…${upper}, target ${target}: need at least one limit, all finite`,
    );
  }
  if (lower !== undefined && upper !== undefined && !(lower < upper)) {
    throw new RangeError(`Cannot judge capability within ${lower}…${upper}: need lower < upper`);
  }
}
