// Pure: no I/O, no clock, no hidden randomness.
// What errors of the cross-section do to a guide's Δβ, to first and to second order.
import { type GeometryParameter, mismatch } from "../guides/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { MismatchBend, MismatchSensitivity } from "./drawn_traits.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import { type PlatformModel, validTemperatures } from "./platform_model.ts";

/**
 * ∂Δβ/∂parameter in the middle of the oven's range: over it the slope changes by a few per cent, which is little beside
 * the uncertainty that it carries. 0 where the index does not depend on the parameter, or is not known.
 */
export function mismatchSensitivity(
  model: PlatformModel,
  waves: ThreeWaves,
  checked: CheckedRequest,
  guide: GuideInputs,
): MismatchSensitivity {
  const at = middleOfOven(model, waves, checked, guide);
  if (at === null) return () => 0;
  const one = (pol: Polarisation, lambda: number, parameter: GeometryParameter) =>
    2 * Math.PI / lambda * model.index.sensitivity(pol, lambda, at, guide.geometry, parameter);
  return (parameter) =>
    one(waves.polP, waves.lambdaP, parameter) - one(waves.polS, waves.lambdaS, parameter) -
    one(waves.polI, waves.lambdaI, parameter);
}

/**
 * How Δβ bends over the errors of the geometry, at the same temperature: near a non-critical width that is all that a
 * width error does. By differences one standard uncertainty wide; 0 where these reach beyond the index.
 */
export function mismatchBend(
  model: PlatformModel,
  waves: ThreeWaves,
  checked: CheckedRequest,
  guide: GuideInputs,
): MismatchBend {
  const at = middleOfOven(model, waves, checked, guide);
  if (at === null) return () => 0;
  const held = guide.geometry as unknown as Readonly<Record<string, number | undefined>>;
  return (a, b) => {
    const [x, y] = [held[a.parameter], held[b.parameter]];
    if (x === undefined || y === undefined) return 0;
    const one = a.parameter === b.parameter;
    const of = (i: number, j: number) => {
      const off = one
        ? { [a.parameter]: x + i * a.u }
        : { [a.parameter]: x + i * a.u, [b.parameter]: y + j * b.u };
      return mismatch(model.index, waves, at, { ...guide.geometry, ...off });
    };
    try {
      return one
        ? (of(1, 0) - 2 * of(0, 0) + of(-1, 0)) / a.u ** 2
        : (of(1, 1) - of(1, -1) - of(-1, 1) + of(-1, -1)) / (4 * a.u * b.u);
    } catch (error) {
      if (error instanceof RangeError) return 0;
      throw error;
    }
  };
}

/** Middle of what the oven and every index have in common, °C; null where a wave has no index. */
function middleOfOven(
  model: PlatformModel,
  waves: ThreeWaves,
  { request }: CheckedRequest,
  { geometry }: GuideInputs,
): number | null {
  const valid = validTemperatures(model, waves, geometry);
  if ("reason" in valid) return null;
  const [low, high] = [0, 1].map((k) =>
    Math.min(valid.range[1], Math.max(valid.range[0], request.oven_c[k]!))
  );
  return (low! + high!) / 2;
}
