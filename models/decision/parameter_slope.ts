// Pure: no I/O, no clock, no hidden randomness.
// How Δβ follows one parameter of a design, and where it does not to first order.
import {
  GEOMETRY_PARAMETERS,
  type GeometryParameter,
  PROCESS_PARAMETERS,
  type ProcessParameter,
  type SolverIndexModel,
} from "../guides/mod.ts";
import type { GuideGeometry, Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { PlatformModel } from "./platform_model.ts";

/** Where a slope is taken. Every parameter that the index depends on has to be stated. */
export interface SlopePoint {
  readonly waves: ThreeWaves;
  readonly geometry: GuideGeometry;
  readonly temperatureC: number;
}

/** ∂Δβ/∂parameter, 1/m per unit of its name; 0 where the index does not depend on it. */
export function parameterSlope(
  { index }: PlatformModel,
  { waves, geometry, temperatureC }: SlopePoint,
  parameter: GeometryParameter | ProcessParameter,
): number {
  const one = (pol: Polarisation, lambda: number): number => {
    const per = isGeometry(parameter)
      ? index.sensitivity(pol, lambda, temperatureC, geometry, parameter)
      : index.from === "solver"
      ? (index as SolverIndexModel).processSensitivity(pol, lambda, temperatureC, geometry, parameter)
      : 0;
    return 2 * Math.PI / lambda * per;
  };
  return one(waves.polP, waves.lambdaP) - one(waves.polS, waves.lambdaS) - one(waves.polI, waves.lambdaI);
}

/** A parameter of the cross-section as drawn, not of the process. */
export const isGeometry = (parameter: string): parameter is GeometryParameter =>
  (GEOMETRY_PARAMETERS as readonly string[]).includes(parameter) &&
  !(PROCESS_PARAMETERS as readonly string[]).includes(parameter);

/** Widths are looked through in so many steps. */
const WIDTH_STEPS = 60;
/** Half of the stretch (µm) that the curvature is taken over. */
const CURVED_OVER = 0.02;

/** A width at which Δβ does not change with the width to first order. */
export interface NonCriticalWidth {
  readonly width_um: number;
  /** ∂²Δβ/∂width², 1/m per µm²: what is left is half of it times the square of the error. */
  readonly curvature: number;
}

/**
 * Non-critical widths, ascending; within the index's limits for this design. None: width errors count everywhere.
 */
export function nonCriticalWidths(
  model: PlatformModel,
  point: SlopePoint,
): { readonly widths: NonCriticalWidth[]; readonly range_um: readonly [number, number] | null } {
  const { waves, geometry } = point;
  const limits = [waves.polP, waves.polS, waves.polI].map((pol) => model.index.range(pol, geometry).width_um);
  if (limits.some((l) => l === undefined)) return { widths: [], range_um: null };
  const low = Math.max(...limits.map((l) => l![0]));
  const high = Math.min(...limits.map((l) => l![1]));
  const per = (width_um: number) =>
    parameterSlope(model, { ...point, geometry: { ...geometry, width_um } }, "width_um");
  const at = (k: number) => low + (high - low) * k / WIDTH_STEPS;
  const widths: NonCriticalWidth[] = [];
  for (let k = 0; k < WIDTH_STEPS; k++) {
    let [a, b] = [at(k), at(k + 1)];
    const left = per(a);
    if (left * per(b) > 0) continue;
    while (b - a > 1e-6) {
      const middle = (a + b) / 2;
      if (left * per(middle) > 0) a = middle;
      else b = middle;
    }
    const width_um = (a + b) / 2;
    const from = Math.max(low, width_um - CURVED_OVER);
    const to = Math.min(high, width_um + CURVED_OVER);
    widths.push({ width_um, curvature: (per(to) - per(from)) / (to - from) });
  }
  return { widths, range_um: [low, high] };
}
