// Pure: no I/O, no clock, no hidden randomness.
// How Δβ follows one parameter of a design, and where it does not to first order.
import {
  GEOMETRY_PARAMETERS,
  type GeometryParameter,
  PROCESS_PARAMETERS,
  type ProcessParameter,
  type SolverIndexModel,
  type WidthScan,
  widthSlopes,
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

/** Non-critical widths, ascending, and the widths that were looked through. None: width errors count everywhere. */
export interface NonCriticalWidths {
  readonly widths: NonCriticalWidth[];
  /** µm; null where the index does not depend on the width. */
  readonly range_um: readonly [number, number] | null;
  /** Why no narrower widths were looked through, or null. */
  readonly cutOff: string | null;
}

/** Non-critical widths within the index's limits for this design or, with a scan of a solved one, as far as it goes. */
export function nonCriticalWidths(
  model: PlatformModel,
  point: SlopePoint,
  scan?: WidthScan,
): NonCriticalWidths {
  if (scan !== undefined && scan.guided.length > 0) {
    const { slope, curvature } = widthSlopes(scan);
    const widths = turningPoints(slope, scan.widths_um).map((w) => ({
      width_um: w,
      curvature: curvature(w),
    }));
    return { widths, range_um: scan.widths_um, cutOff: scan.cutOff };
  }
  const { waves, geometry } = point;
  const limits = [waves.polP, waves.polS, waves.polI].map((pol) => model.index.range(pol, geometry).width_um);
  if (limits.some((l) => l === undefined)) return { widths: [], range_um: null, cutOff: null };
  const low = Math.max(...limits.map((l) => l![0]));
  const high = Math.min(...limits.map((l) => l![1]));
  const per = (width_um: number) =>
    parameterSlope(model, { ...point, geometry: { ...geometry, width_um } }, "width_um");
  const widths = turningPoints(per, [low, high]).map((width_um) => {
    const from = Math.max(low, width_um - CURVED_OVER);
    const to = Math.min(high, width_um + CURVED_OVER);
    return { width_um, curvature: (per(to) - per(from)) / (to - from) };
  });
  return { widths, range_um: [low, high], cutOff: null };
}

/** Zeros of a slope, each between two of the steps that its range is looked through in. */
function turningPoints(
  slope: (width_um: number) => number,
  [low, high]: readonly [number, number],
): number[] {
  const at = (k: number) => low + (high - low) * k / WIDTH_STEPS;
  const found: number[] = [];
  for (let k = 0; k < WIDTH_STEPS; k++) {
    let [a, b] = [at(k), at(k + 1)];
    const left = slope(a);
    if (left * slope(b) > 0) continue;
    while (b - a > 1e-6) {
      const middle = (a + b) / 2;
      if (left * slope(middle) > 0) a = middle;
      else b = middle;
    }
    found.push((a + b) / 2);
  }
  return found;
}
