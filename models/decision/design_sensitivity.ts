// Pure: no I/O, no clock, no hidden randomness.
// What a small error of fabrication or temperature does to a design's phase matching.
import { type GeometryParameter, mismatch, mismatchOverTemperature, processName } from "../guides/mod.ts";
import type { GuideGeometry, Polarisation, Process, ThreeWaves } from "../../shared/vocabulary.ts";
import { isGeometry, parameterSlope, type SlopePoint } from "./parameter_slope.ts";
import type { PlatformModel } from "./platform_model.ts";
import { PROCESS_NUDGES, type ProcessNudge } from "./process_changes.ts";
import { acceptanceScan } from "./site.ts";

/** What may be off, by how much in the unit of its name. */
export interface Nudge {
  readonly parameter: GeometryParameter | ProcessNudge["parameter"] | "temperature_c";
  readonly by: number;
}

/** Small errors as they occur: 0.1 µm of width, 1 nm of a film, those of the process, 1 °C. */
export const NUDGES: readonly Nudge[] = [
  { parameter: "width_um", by: 0.1 },
  { parameter: "film_thickness_nm", by: 1 },
  { parameter: "etch_depth_nm", by: 1 },
  { parameter: "titanium_nm", by: 1 },
  ...PROCESS_NUDGES,
  { parameter: "temperature_c", by: 1 },
];

export interface SensitivityPoint extends SlopePoint {
  readonly process: Process;
}

/** What one nudge does. */
export interface NudgeEffect extends Nudge {
  /**
   * Change of Δβ, 1/m: of the guide as it is after the nudge (near a non-critical width the slope alone says nothing);
   * to first order where that guide has no mode or was not solved; for a temperature what is left of it beside the
   * expansion of the grating.
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

/**
 * A nudge down is told, too, where it is no mirror image of the nudge up: from this share of it. Where a nudge sends the
 * centre out of reach, a tenth of it is told beside it.
 */
const ASYMMETRY = 0.1;

/**
 * The effects of all nudges that the platform's index depends on. `changed`: the platform as it is with its process off;
 * without it a process is told to first order and without efficiency.
 * @throws RangeError beyond the index's limits
 */
export function nudgeEffects(
  model: PlatformModel,
  point: SensitivityPoint,
  changed: readonly (ProcessNudge & { readonly model: PlatformModel })[] = [],
): NudgeEffect[] {
  const { waves, geometry, temperatureC: T } = point;
  const net = netMismatch(model, waves, geometry);
  const warmest = model.index.range(waves.polP, geometry).temperatureC;
  const perKelvin = slope(net, T, 0.5, warmest);
  const centre = centreMove(model, point);
  const here = mismatch(model.index, waves, T, geometry);
  const before = strength(model, point);
  /** The guide with one thing off, or null where there is none such. */
  const nudged = ({ parameter, by }: Nudge): { model: PlatformModel; point: SensitivityPoint } | null => {
    if (parameter === "temperature_c") return { model, point: { ...point, temperatureC: T + by } };
    if (isGeometry(parameter)) {
      const held = geometry[parameter as GeometryParameter];
      return held === undefined
        ? null
        : { model, point: { ...point, geometry: { ...geometry, [parameter]: held + by } } };
    }
    const other = changed.find((c) => c.parameter === parameter && c.by === by);
    return other === undefined ? null : { model: other.model, point };
  };
  const effect = (nudge: Nudge, deltaBeta: number): NudgeEffect => {
    const there = nudged(nudge);
    const after = there === null ? null : strength(there.model, there.point);
    return {
      ...nudge,
      deltaBeta,
      centre: centre(deltaBeta),
      temperatureC: nudge.parameter === "temperature_c" ? null : -deltaBeta / perKelvin,
      efficiency: before === null || after === null ? null : after / before - 1,
    };
  };
  return NUDGES.flatMap((nudge): NudgeEffect[] => {
    const { parameter, by } = nudge;
    if (parameter === "temperature_c") return [effect(nudge, perKelvin * by)];
    const furnace = parameter === "diffusion_hours" || parameter === "diffusion_temperature_c";
    const per = furnace ? null : parameterSlope(model, point, parameter);
    if (per === 0 || (furnace && !changed.some((c) => c.parameter === parameter))) return [];
    const change = (step: number): number | null => {
      const there = nudged({ parameter, by: step });
      const first = per === null ? null : per * step;
      if (there === null) return first;
      try {
        return mismatch(there.model.index, waves, T, there.point.geometry) - here;
      } catch (error) {
        if (error instanceof RangeError) return first; // beyond the table, or no mode left
        throw error;
      }
    };
    const [up, down] = [change(by), change(-by)];
    const both = up === null ? [] : [effect(nudge, up)];
    if (
      down !== null && Math.abs((up ?? 0) + down) > ASYMMETRY * Math.max(Math.abs(up ?? 0), Math.abs(down))
    ) {
      both.push(effect({ parameter, by: -by }, down));
    }
    const tenth = both.some(({ centre }) => centre === null) && isGeometry(parameter)
      ? change(by / 10)
      : null;
    if (tenth !== null) both.push(effect({ parameter, by: by / 10 }, tenth));
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

/** Period (m at 25 °C) that matches at the point's temperature. @throws RangeError beyond the index's limits */
export function matchingPeriod(
  model: PlatformModel,
  { waves, geometry, temperatureC }: SlopePoint,
): number {
  const scaled = mismatch(model.index, waves, temperatureC, geometry) * model.expansion(temperatureC);
  return 2 * Math.PI / Math.abs(scaled);
}

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
function strength(model: PlatformModel, { waves, geometry, temperatureC }: SlopePoint): number | null {
  try {
    const n = (pol: Polarisation, lambda: number) => model.index.nEff(pol, lambda, temperatureC, geometry);
    const indices = n(waves.polP, waves.lambdaP) * n(waves.polS, waves.lambdaS) *
      n(waves.polI, waves.lambdaI);
    const process = processName(waves.polP, waves.polS, waves.polI);
    return 1 / (indices * model.area.effectiveArea(process, geometry, waves));
  } catch (error) {
    if (error instanceof RangeError) return null;
    throw error;
  }
}
