// Pure: no I/O, no clock, no hidden randomness.
// What a tuning scan of one process tells of another one on the same guide: both follow the same cross-section.
import type { GeometryParameter } from "../guides/mod.ts";
import { processName } from "../guides/mod.ts";
import type { ThreeWaves } from "../../shared/vocabulary.ts";
import type { MismatchBend, MismatchSensitivity, UncertainParameter } from "./drawn_traits.ts";
import type { GuideInputs, OtherScan, UsedTrait } from "./guide_inputs.ts";

/** How the Δβ of a process follows the cross-section, to first and to second order. */
export interface ProcessSlopes {
  readonly slope: MismatchSensitivity;
  readonly bend: MismatchBend;
}

/** Draws of what a parameter is off by from its mean, in its own unit. */
export interface DrawnError extends UncertainParameter {
  readonly off: Float64Array;
}

/** What a scan tells of the errors of a cross-section; every number before any draw. */
export interface ToldErrors {
  readonly scan: OtherScan;
  /** Scan less what was expected of it, 1/m. */
  readonly surprise: number;
  /** What else than the cross-section the surprise may be: a scan's offset with the u of all that. */
  readonly rest: UsedTrait;
  /** Share of the surprise's variance that it has from the errors which it tells of. */
  readonly share: number;
  /** 1/m per unit of the parameter: how much of its error is in the surprise. */
  weight(parameter: GeometryParameter): number;
  /** Unit of the parameter per 1/m: how far its mean moves with the surprise. */
  gain(parameter: GeometryParameter): number;
  readonly bend: MismatchBend;
}

/**
 * Of a guide's scans of other processes the one that tells most of its cross-section. One counts: what the calculation is
 * wrong by is likely the same for several, and counting them as independent would promise too much.
 *
 * The surprise y = offset − expected is Σ S_i δq_i + e, S = ∂Δβ/∂q of the scanned process, e ~ N(0, s² + u²) what the expectation
 * and the scan may be off by. Linear and normal, with prior variances u_i²: the mean of δq_i moves by G_i·y, G_i = C_i/D, and
 * the covariance narrows by C_i·C_j/D, C_i = Cov(δq_i, y), D = Var(y) (R. E. Kalman, J. Basic Eng. 82, 35 (1960); from memory).
 *
 * Guides of a lot share part of δq: an expectation pooled from scans of its other guides holds that part already, and then it
 * is in y no more. With the shares `felt` (of u_i², in y) and `own` ≤ `felt` (what may be told of the guide, the rest being in
 * what is expected of the asked process too): C_i = S_i·own_i·u_i², D = Σ S_i²·felt_i·u_i² + s² + u² + the variance of the second
 * order, ½Σ b_ij²·u_i²·u_j². That D is not too small: of scans with weight W, a share f = W·V/u² of the variance V in common,
 * Var(S·δq − W·S·common) = S²(u² − 2fu² + W·f·u²) ≤ S²u²(1 − f). Second order has no covariance with δq, only a mean, of which
 * the expectation holds as much as it has from scans.
 * @returns null where no scan tells anything
 */
export function tellingScan(
  { otherScans = [], geometryErrors }: Pick<GuideInputs, "otherScans" | "geometryErrors">,
  slopesOf: (waves: ThreeWaves) => ProcessSlopes,
): ToldErrors | null {
  const told = otherScans.map((scan) => toldBy(scan, geometryErrors, slopesOf(scan.waves)));
  return told.reduce<ToldErrors | null>((a, b) => b.share > (a?.share ?? 0) ? b : a, null);
}

function toldBy(
  scan: OtherScan,
  geometryErrors: GuideInputs["geometryErrors"],
  { slope, bend }: ProcessSlopes,
): ToldErrors {
  const { offset, expected, read } = scan;
  const errors = geometryErrors.filter((e) => e.trait.u > 0).map(({ parameter, trait: { u } }) => {
    const { felt, own } = scan.shares[parameter] ?? { felt: 1, own: 1 };
    const S = slope(parameter);
    return { parameter, u, weight: own * S, told: own * S * u * u, felt: felt * (S * u) ** 2 };
  });
  let [bent, bentVariance] = [0, 0];
  for (const a of errors) {
    for (const b of errors) {
      const second = bend(a, b) * a.u * b.u;
      if (a === b) bent += second / 2;
      bentVariance += second ** 2 / 2;
    }
  }
  const noise = expected.u ** 2 + offset.u ** 2;
  const variance = errors.reduce((sum, e) => sum + e.felt, noise + bentVariance);
  const known = errors.reduce((sum, e) => sum + e.weight * e.told, 0);
  const tells = errors.reduce((sum, e) => sum + slope(e.parameter) * e.told, 0);
  const of = (parameter: GeometryParameter) => errors.find((e) => e.parameter === parameter);
  return {
    scan,
    surprise: offset.value - expected.value - (1 - read) * bent,
    rest: {
      ...offset,
      key: `${offset.key}|by the cross-section`,
      u: Math.sqrt(Math.max(0, variance - known - bentVariance)),
    },
    share: tells > 0 ? tells / variance : 0,
    weight: (parameter) => of(parameter)?.weight ?? 0,
    gain: (parameter) => tells > 0 ? (of(parameter)?.told ?? 0) / variance : 0,
    bend,
  };
}

/**
 * Draws of the errors as a scan leaves them: δq_i + G_i·(y − y_k), y_k what the scan would have read with draw k, its own e_k in
 * it (conditioning by kriging: A. G. Journel & C. J. Huijbregts, Mining Geostatistics, 1978; from memory). Exact for what is linear
 * and normal; draws stay as correlated as they have to be.
 * @param rest draws of e, 1/m
 */
export function narrowed(
  { surprise, weight, gain, bend }: ToldErrors,
  errors: readonly DrawnError[],
  rest: Float64Array,
): DrawnError[] {
  const read = Float64Array.from(rest);
  addErrors(read, errors, { slope: weight, bend });
  // Second order counts from its mean, which is off the surprise already.
  const bent = errors.reduce((sum, e) => sum + bend(e, e) * e.u ** 2 / 2, 0);
  return errors.map((e) => {
    const by = gain(e.parameter);
    return { ...e, off: by === 0 ? e.off : e.off.map((d, k) => d + by * (surprise + bent - read[k]!)) };
  });
}

/** Adds what errors of the cross-section make of a Δβ, 1/m. */
export function addErrors(
  to: Float64Array,
  errors: readonly DrawnError[],
  { slope, bend }: ProcessSlopes,
): void {
  for (const { parameter, off } of errors) {
    const by = slope(parameter);
    if (by !== 0) off.forEach((d, k) => to[k]! += by * d);
  }
  errors.forEach((a, m) =>
    errors.slice(m).forEach((b) => {
      const half = bend(a, b) / (a === b ? 2 : 1);
      if (half !== 0) a.off.forEach((d, k) => to[k]! += half * d * b.off[k]!);
    })
  );
}

/** Name of a scan's offset among the traits of a guide for which another process is asked. */
export const otherScanTrait = ({ polP, polS, polI }: ThreeWaves): string =>
  `${processName(polP, polS, polI)} mismatch_offset_per_m`;

/** What a scan of another process does to a guide's phase matching, for people. */
export function otherScanRemarks(
  { otherScans = [], geometryErrors }: Pick<GuideInputs, "otherScans" | "geometryErrors">,
  told: ToldErrors | null,
  slope: MismatchSensitivity,
): string[] {
  if (otherScans.length === 0) return [];
  if (told === null) {
    return [
      "other_scan: the guide's scan is of another process, and no uncertain parameter of the cross-section moves that: not used",
    ];
  }
  const { waves } = told.scan;
  const sum = (f: (parameter: GeometryParameter, u: number) => number) =>
    geometryErrors.reduce((total, { parameter, trait }) => total + f(parameter, trait.u), 0);
  const before = sum((p, u) => (slope(p) * u) ** 2);
  const gain = sum((p) => slope(p) * told.gain(p));
  const after = before - gain * sum((p, u) => slope(p) * told.weight(p) * u * u);
  const name = processName(waves.polP, waves.polS, waves.polI);
  const [shift, from, to] = [gain * told.surprise, Math.sqrt(before), Math.sqrt(Math.max(0, after))]
    .map((x) => x.toPrecision(3));
  const best = otherScans.length > 1 ? ", the one of its scans that tells most," : "";
  return [
    `other_scan: the guide's scan of ${name} at ${
      (waves.lambdaS * 1e9).toFixed(1)
    } nm${best} acts by the cross-section: Δβ moves by ${shift} 1/m, and its u from the cross-section falls from ${from} to ${to} 1/m`,
  ];
}
