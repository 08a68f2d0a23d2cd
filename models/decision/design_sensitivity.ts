// Pure: no I/O, no clock, no hidden randomness.
// What a small error of fabrication or temperature does to a design's phase matching.
import {
  GEOMETRY_PARAMETERS,
  type GeometryParameter,
  mismatch,
  mismatchOverTemperature,
  PROCESS_PARAMETERS,
  processName,
  type ProcessParameter,
  type SolverIndexModel,
} from "../guides/mod.ts";
import type { GuideGeometry, Polarisation, Process, ThreeWaves } from "../../shared/vocabulary.ts";
import type { PlatformModel } from "./platform_model.ts";
import { acceptanceScan } from "./site.ts";

/** What may be off, by how much in the unit of its name. */
export interface Nudge {
  readonly parameter: GeometryParameter | ProcessParameter | "temperature_c";
  readonly by: number;
}

/** Small errors as they occur: 0.1 µm of width, 1 nm of a film, 0.1 µm of diffusion, 1e-4 of an index step, 1 °C. */
export const NUDGES: readonly Nudge[] = [
  { parameter: "width_um", by: 0.1 },
  { parameter: "film_thickness_nm", by: 1 },
  { parameter: "etch_depth_nm", by: 1 },
  { parameter: "titanium_nm", by: 1 },
  { parameter: "diffusion_lateral_um", by: 0.1 },
  { parameter: "diffusion_depth_um", by: 0.1 },
  { parameter: "exchange_depth_um", by: 0.1 },
  { parameter: "index_step", by: 1e-4 },
  { parameter: "temperature_c", by: 1 },
];

export interface SensitivityPoint {
  readonly waves: ThreeWaves;
  readonly process: Process;
  /** Every parameter that the index depends on has to be stated. */
  readonly geometry: GuideGeometry;
  readonly temperatureC: number;
}

/** What one nudge does. */
export interface NudgeEffect extends Nudge {
  /**
   * Change of Δβ, 1/m: of the geometry as it is after the nudge (near a non-critical width the slope alone says nothing),
   * of a process parameter to first order; for a temperature what is left of it beside the expansion of the grating.
   */
  readonly deltaBeta: number;
  /**
   * By how much the centre moves at fixed temperature and period, m; in the wave that an acceptance is scanned in. Null
   * where no wavelength near it has the mismatch that is left.
   */
  readonly centre: number | null;
  /** By how much the oven has to follow at fixed wavelength, °C, to first order; null for a temperature itself. */
  readonly temperatureC: number | null;
  /** Relative change of the peak efficiency by the indices and the effective area; null where no area is known. */
  readonly efficiency: number | null;
}

/** A nudge down is told, too, where it is no mirror image of the nudge up: from this share of it. */
const ASYMMETRY = 0.1;

/** The effects of all nudges that the platform's index depends on. @throws RangeError beyond its limits */
export function nudgeEffects(model: PlatformModel, point: SensitivityPoint): NudgeEffect[] {
  const { waves, geometry, temperatureC: T } = point;
  const net = netMismatch(model, waves, geometry);
  const perKelvin = slope(net, T, 0.5, model.index.range(waves.polP, geometry).temperatureC);
  const centre = centreMove(model, point);
  const here = mismatch(model.index, waves, T, geometry);
  const before = strength(model, point, {});
  const effect = (parameter: Nudge["parameter"], by: number, deltaBeta: number): NudgeEffect => {
    const warm = parameter === "temperature_c";
    const after = !warm && isGeometry(parameter) ? strength(model, point, { [parameter]: by }) : null;
    return {
      parameter,
      by,
      deltaBeta,
      centre: centre(deltaBeta),
      temperatureC: warm ? null : -deltaBeta / perKelvin,
      efficiency: before === null || after === null ? null : after / before - 1,
    };
  };
  return NUDGES.flatMap(({ parameter, by }): NudgeEffect[] => {
    if (parameter === "temperature_c") return [effect(parameter, by, perKelvin * by)];
    const per = parameterSlope(model, point, parameter);
    if (per === 0) return [];
    const change = (step: number): number => {
      if (!isGeometry(parameter)) return per * step;
      try {
        return mismatch(model.index, waves, T, nudged(geometry, { [parameter]: step })) - here;
      } catch (error) {
        if (error instanceof RangeError) return per * step; // beyond the table
        throw error;
      }
    };
    const [up, down] = [change(by), change(-by)];
    const both = [effect(parameter, by, up)];
    if (Math.abs(up + down) > ASYMMETRY * Math.max(Math.abs(up), Math.abs(down))) {
      both.push(effect(parameter, -by, down));
    }
    return both;
  });
}

/** The centre is looked for no farther than this share of the wavelength away. */
const CENTRE_WITHIN = 0.05;

/** Move of the scanned wavelength (m) that makes up for a change of Δβ, by slope and curvature: type II may have no slope. */
function centreMove(
  model: PlatformModel,
  { waves, process, geometry, temperatureC }: SensitivityPoint,
): (deltaBeta: number) => number | null {
  const scan = acceptanceScan(process, waves);
  const h = 2e-4 * scan.centre;
  const at = (k: number) => mismatch(model.index, scan.waves(scan.centre + k * h), temperatureC, geometry);
  const [low, middle, high] = [at(-1), at(0), at(1)];
  const first = (high - low) / (2 * h);
  const second = (high - 2 * middle + low) / (2 * h * h);
  return (deltaBeta) => {
    const root = first * first - 4 * second * deltaBeta;
    if (root < 0) return null;
    // The root that vanishes with the change; written so that nothing cancels.
    const x = -2 * deltaBeta / (first + Math.sign(first || 1) * Math.sqrt(root));
    return Number.isFinite(x) && Math.abs(x) <= CENTRE_WITHIN * scan.centre ? x : null;
  };
}

const nudged = (geometry: GuideGeometry, by: Readonly<Record<string, number>>): GuideGeometry => {
  const out: Record<string, number> = { ...geometry as unknown as Record<string, number> };
  for (const [key, step] of Object.entries(by)) out[key]! += step;
  return out as unknown as GuideGeometry;
};

/** ∂Δβ/∂parameter, 1/m per unit of its name; 0 where the index does not depend on it. */
export function parameterSlope(
  { index }: PlatformModel,
  { waves, geometry, temperatureC }: Omit<SensitivityPoint, "process">,
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

/** Widths are looked through in so many steps. */
const WIDTH_STEPS = 60;

/**
 * Widths (µm) at which Δβ does not change with the width to first order, ascending; within limits, or the index's own
 * for this design. None: width errors count everywhere.
 */
export function nonCriticalWidths(
  model: PlatformModel,
  point: Omit<SensitivityPoint, "process">,
): { readonly widths_um: number[]; readonly range_um: readonly [number, number] | null } {
  const { waves, geometry } = point;
  const limits = [waves.polP, waves.polS, waves.polI].map((pol) => model.index.range(pol, geometry).width_um);
  if (limits.some((l) => l === undefined)) return { widths_um: [], range_um: null };
  const low = Math.max(...limits.map((l) => l![0]));
  const high = Math.min(...limits.map((l) => l![1]));
  const per = (width_um: number) =>
    parameterSlope(model, { ...point, geometry: { ...geometry, width_um } }, "width_um");
  const widths_um: number[] = [];
  const at = (k: number) => low + (high - low) * k / WIDTH_STEPS;
  for (let k = 0; k < WIDTH_STEPS; k++) {
    let [a, b] = [at(k), at(k + 1)];
    const left = per(a);
    if (left * per(b) > 0) continue;
    while (b - a > 1e-6) {
      const middle = (a + b) / 2;
      if (left * per(middle) > 0) a = middle;
      else b = middle;
    }
    widths_um.push((a + b) / 2);
  }
  return { widths_um, range_um: [low, high] };
}

/** Period (m at 25 °C) that matches at the point's temperature. @throws RangeError beyond the index's limits */
export function matchingPeriod(
  model: PlatformModel,
  { waves, geometry, temperatureC }: Omit<SensitivityPoint, "process">,
): number {
  const scaled = mismatch(model.index, waves, temperatureC, geometry) * model.expansion(temperatureC);
  return 2 * Math.PI / Math.abs(scaled);
}

const isGeometry = (parameter: GeometryParameter | ProcessParameter): parameter is GeometryParameter =>
  (GEOMETRY_PARAMETERS as readonly string[]).includes(parameter) &&
  !(PROCESS_PARAMETERS as readonly string[]).includes(parameter);

/** Δβ(T) less what the grating's own expansion follows: its slope over Δβ's is what an oven tunes with. */
function netMismatch(
  model: PlatformModel,
  waves: ThreeWaves,
  geometry: GuideGeometry,
): (at: number) => (temperatureC: number) => number {
  const bare = mismatchOverTemperature(model.index, waves, geometry);
  return (at) => {
    const target = bare(at) * model.expansion(at);
    return (T) => bare(T) - target / model.expansion(T);
  };
}

function slope(
  net: (at: number) => (temperatureC: number) => number,
  T: number,
  step: number,
  [low, high]: readonly [number, number],
): number {
  const [a, b] = [Math.max(low, T - step), Math.min(high, T + step)];
  const f = net(T);
  return (f(b) - f(a)) / (b - a);
}

/** What the peak efficiency is proportional to: 1/(n_p n_s n_i A); null where no area is known. */
function strength(
  model: PlatformModel,
  { waves, geometry, temperatureC }: SensitivityPoint,
  nudge: Readonly<Record<string, number>>,
): number | null {
  const there = nudged(geometry, nudge);
  try {
    const n = (pol: Polarisation, lambda: number) => model.index.nEff(pol, lambda, temperatureC, there);
    const indices = n(waves.polP, waves.lambdaP) * n(waves.polS, waves.lambdaS) *
      n(waves.polI, waves.lambdaI);
    const process = processName(waves.polP, waves.polS, waves.polI);
    return 1 / (indices * model.area.effectiveArea(process, there, waves));
  } catch (error) {
    if (error instanceof RangeError) return null;
    throw error;
  }
}
