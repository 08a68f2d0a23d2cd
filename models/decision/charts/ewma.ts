// Pure: no I/O, no clock, no hidden randomness.
import { type ControlChart, finishChart } from "./control_chart.ts";

export interface EwmaSetting {
  /** Centre that the values should keep. */
  readonly target: number;
  /** Standard deviation of a single value. */
  readonly sigma: number;
  /** Weight of the newest value, 0 < λ ≤ 1; small weights find small steps. */
  readonly weight: number;
}

/**
 * Chart of the exponentially weighted mean e_i = λ·x_i + (1 − λ)·e_(i−1), e_0 = target, with three-sigma limits of
 * its own standard deviation σ·√(λ/(2 − λ)·[1 − (1 − λ)^2i]) (S. W. Roberts, Technometrics 1, 239 (1959);
 * NIST/SEMATECH e-Handbook, 6.3.2.4). A NaN leaves the mean as it was and is no point. Only single points are judged:
 * neighbours are correlated by design.
 * @throws RangeError for a weight outside (0, 1], a sigma that is not > 0 or a target that is not finite
 */
export function ewmaChart(values: ArrayLike<number>, setting: EwmaSetting): ControlChart {
  const { target, sigma, weight } = setting;
  if (!(weight > 0 && weight <= 1) || !(sigma > 0 && sigma < Infinity) || !Number.isFinite(target)) {
    throw new RangeError(
      `Cannot chart a weighted mean with weight ${weight}, sigma ${sigma}, target ${target}: need 0 < weight <= 1, sigma > 0 and a finite target`,
    );
  }
  const means: number[] = [];
  const sigmas: number[] = [];
  let [now, fade] = [target, 1];
  for (let i = 0; i < values.length; i++) {
    const missing = Number.isNaN(values[i]!);
    if (!missing) {
      now += weight * (values[i]! - now);
      fade *= (1 - weight) ** 2;
    }
    means.push(missing ? NaN : now);
    sigmas.push(sigma * Math.sqrt(weight / (2 - weight) * (1 - fade)));
  }
  return finishChart({
    kind: "ewma",
    values: means,
    centre: () => target,
    sigma: (i) => sigmas[i]!,
    baseline: 0,
    rules: ["beyond_3s"],
  });
}
