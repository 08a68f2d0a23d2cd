// Pure: no I/O, no clock, no hidden randomness.
import { type AreaModel, type IndexModel, processName, propagationAxis } from "../guides/mod.ts";
import { expansionFactor, type Material, millerScaled } from "../materials/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { GuideGeometry, Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import { nm } from "../../shared/units.ts";

/** What a platform says of any guide: index, area, nonlinearity, expansion. */
export interface PlatformModel {
  readonly id: string;
  readonly material: Material;
  readonly index: IndexModel;
  readonly area: AreaModel;
  /** length(T)/length(25 °C) along the guide. */
  expansion(temperatureC: number): number;
  /**
   * Crystal coefficient d of a process in m/V at its wavelengths (Miller's rule), or the reason why there is none.
   * The coefficient of pump>signal+idler serves its reverse, and both orders of signal and idler.
   */
  nonlinear(waves: ThreeWaves): number | { readonly reason: string };
  /** n_o outside the facets. */
  readonly outsideIndex: number;
  /** Share that a fibre (mode-field diameter in m) takes of a guide's solved field, in the middle of it; null where none was solved. */
  readonly solvedCoupling: SolvedCoupling;
}

export type SolvedCoupling = (
  geometry: GuideGeometry,
  pol: Polarisation,
  lambda: number,
  fibreMfd: number,
) => number | null;

/** Joins a platform file with its index and area models. @throws RangeError for axes that the material does not have */
export function platformModel(
  platform: Platform,
  index: IndexModel,
  area: AreaModel,
  solvedCoupling: SolvedCoupling = () => null,
): PlatformModel {
  const { material, axes } = platform;
  const along = propagationAxis(material, axes);
  expansionFactor(material, along, 25); // refuses a direction without published expansion before anything is computed
  const coefficients = new Map(
    Object.entries(platform.nonlinear).map(([key, { d_pm_per_v, at_nm }]) => {
      const [pump, signal, idler] = key.split(/[>+]/) as ("TE" | "TM")[];
      // Miller's rule starts from the second harmonic of `at_nm`: no index there is the platform file's mistake.
      const at = nm(at_nm);
      millerScaled(material, 1, at, { p: axes[pump!], s: axes[signal!], i: axes[idler!] }, {
        lambdaP: at / 2,
        lambdaS: at,
        lambdaI: at,
      });
      return [processName(pump!, signal!, idler!), { d: d_pm_per_v * 1e-12, at }] as const;
    }),
  );
  return {
    id: platform.platform,
    material,
    index,
    area,
    expansion: (temperatureC) => expansionFactor(material, along, temperatureC),
    nonlinear(waves) {
      const name = processName(waves.polP, waves.polS, waves.polI);
      const held = coefficients.get(name);
      if (held === undefined) {
        const known = [...coefficients.keys()].join(", ");
        return {
          reason: `platform ${platform.platform} has no nonlinear coefficient for ${name} (it has ${known})`,
        };
      }
      const polAxes = { p: axes[waves.polP], s: axes[waves.polS], i: axes[waves.polI] };
      return millerScaled(material, held.d, held.at, polAxes, waves);
    },
    outsideIndex: platform.outside_index ?? 1,
    solvedCoupling,
  };
}

const cutOffReason = (pol: Polarisation, lambda: number, why: string): string =>
  `${pol} mode at ${Number((lambda * 1e9).toFixed(1))} nm is cut off: ${why}`;

/**
 * Temperatures at which every index of a process is known: the common part of the three ranges.
 * @returns null when a wavelength lies outside, with the reason
 */
export function validTemperatures(
  model: PlatformModel,
  waves: ThreeWaves,
  geometry: GuideGeometry,
): { readonly range: readonly [number, number] } | { readonly reason: string } {
  let low = -Infinity;
  let high = Infinity;
  for (
    const [wave, lambda, pol] of [
      ["pump", waves.lambdaP, waves.polP],
      ["signal", waves.lambdaS, waves.polS],
      ["idler", waves.lambdaI, waves.polI],
    ] as const
  ) {
    let range: ReturnType<IndexModel["range"]>;
    try {
      range = model.index.range(pol, geometry);
    } catch (error) {
      if (error instanceof RangeError) {
        // No mode at all, or a table without this polarisation.
        const none = model.index.cutOff?.(pol, geometry, lambda) ?? null;
        return { reason: none === null ? error.message : cutOffReason(pol, lambda, none) };
      }
      throw error;
    }
    if (lambda < range.lambda[0] || lambda > range.lambda[1]) {
      const ends = lambda > range.lambda[1] ? model.index.cutOff?.(pol, geometry, lambda) ?? null : null;
      if (ends !== null) return { reason: cutOffReason(pol, lambda, ends) };
      const [a, b] = range.lambda.map((x) => Math.round(x * 1e9));
      return {
        reason: `${wave} wavelength ${
          (lambda * 1e9).toFixed(1)
        } nm is outside the index of ${model.id} for ${pol} (${a}–${b} nm)`,
      };
    }
    for (const key of ["width_um", "film_thickness_nm", "etch_depth_nm", "titanium_nm"] as const) {
      const limits = range[key];
      const value = geometry[key];
      if (limits === undefined || value === undefined) continue;
      if (value < limits[0] || value > limits[1]) {
        return {
          reason: `${key} ${value} is outside the index table of ${model.id} (${limits[0]}–${limits[1]})`,
        };
      }
    }
    low = Math.max(low, range.temperatureC[0]);
    high = Math.min(high, range.temperatureC[1]);
  }
  return { range: [low, high] };
}
