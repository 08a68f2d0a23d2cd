// Pure: no I/O, no clock, no hidden randomness.
import type { MismatchProfile } from "../poling/mod.ts";
import type { MismatchSensitivity } from "./drawn_traits.ts";
import type { AlongGuide } from "./guide_inputs.ts";

/**
 * δβ(z) that a cross-section makes as it varies along the guide: each parameter's deviation from its mean, linear between
 * the places it was read at and constant beyond, times ∂Δβ/∂parameter. Undefined where nothing varies.
 */
export function mismatchProfile(
  along: readonly AlongGuide[],
  slope: MismatchSensitivity,
): MismatchProfile | undefined {
  const felt = along.map((a) => ({ ...a, slope: slope(a.parameter) })).filter((a) => a.slope !== 0);
  if (felt.length === 0) return undefined;
  const z = Float64Array.from([...new Set(felt.flatMap((a) => [...a.z]))].sort((a, b) => a - b));
  return { z, delta: z.map((x) => felt.reduce((sum, a) => sum + a.slope * deviationAt(a, x), 0)) };
}

function deviationAt({ z, deviation }: AlongGuide, x: number): number {
  const after = z.findIndex((at) => at >= x);
  if (after < 0) return deviation[deviation.length - 1]!;
  if (after === 0) return deviation[0]!;
  const t = (x - z[after - 1]!) / (z[after]! - z[after - 1]!);
  return deviation[after - 1]! + t * (deviation[after]! - deviation[after - 1]!);
}
