// Pure: no I/O, no clock, no hidden randomness.
import type { GuideGeometry, Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { CrystalAxis } from "../materials/mod.ts";

/** Parameters of the cross-section that an index may depend on; the unit is in the name. */
export const GEOMETRY_PARAMETERS = ["width_um", "film_thickness_nm", "etch_depth_nm", "titanium_nm"] as const;
export type GeometryParameter = typeof GEOMETRY_PARAMETERS[number];

/** Values that stand in where a guide's own geometry is not known, each in its own unit. */
export type NominalGeometry = { readonly [parameter in GeometryParameter]?: number | undefined };

/** The crystal axis that each lab polarisation sees; follows from the platform's cut. */
export interface PolarisationAxes {
  readonly TE: CrystalAxis;
  readonly TM: CrystalAxis;
}

/** Hard limits of an index model: vacuum wavelength in m, temperature in °C, geometry in its own unit. */
export type IndexRange =
  & { lambda: [number, number]; temperatureC: [number, number] }
  & { [parameter in GeometryParameter]?: [number, number] };

/** Index against wavelength at one temperature and geometry: made once, cheap to evaluate many times. */
export interface IndexSlice {
  /** Effective index at a vacuum wavelength (m). @throws RangeError beyond the range */
  n(lambda: number): number;
  /** Group index n − λ·dn/dλ at a vacuum wavelength (m). @throws RangeError beyond the range */
  ng(lambda: number): number;
}

/** One platform's index for any geometry. `lambda`: vacuum wavelength, m; `temperatureC`: °C. */
export interface IndexModel {
  readonly from: "bulk" | "table" | "solver";
  /** @throws RangeError naming the limits, if asked beyond them */
  nEff(pol: Polarisation, lambda: number, temperatureC: number, geometry: GuideGeometry): number;
  /** n_eff − λ·dn_eff/dλ. @throws RangeError naming the limits, if asked beyond them */
  groupIndex(pol: Polarisation, lambda: number, temperatureC: number, geometry: GuideGeometry): number;
  /** The same at one temperature and geometry for many wavelengths. @throws RangeError beyond the limits */
  slice(pol: Polarisation, temperatureC: number, geometry: GuideGeometry): IndexSlice;
  /**
   * n_eff against temperature (°C) at one wavelength (m) and geometry: for finding a temperature.
   * @throws RangeError beyond the limits
   */
  overTemperature(
    pol: Polarisation,
    lambda: number,
    geometry: GuideGeometry,
  ): (temperatureC: number) => number;
  /** ∂n_eff/∂parameter per unit of the parameter's own name (1/µm, 1/nm); 0 if the index does not depend on it. */
  sensitivity(
    pol: Polarisation,
    lambda: number,
    temperatureC: number,
    geometry: GuideGeometry,
    parameter: GeometryParameter,
  ): number;
  /** Limits for a guide of this geometry; without one, those that hold for any. */
  range(pol: Polarisation, geometry?: GuideGeometry): IndexRange;
  /**
   * A sentence where the bulk index under the answer is beyond its published range, or a guide of this geometry carries
   * more than one mode; several on lines of their own; else null.
   */
  remark(pol: Polarisation, lambda: number, temperatureC: number, geometry?: GuideGeometry): string | null;
  /**
   * Why a guide of this geometry carries no mode beyond the range's wavelengths (`lambda`: the one that is asked for), or
   * none at all; null if it does.
   */
  cutOff?(pol: Polarisation, geometry?: GuideGeometry, lambda?: number): string | null;
}

/**
 * Δβ = β_p − β_s − β_i in 1/m, without a grating term (physics: the domain signs carry it). β = 2π·n_eff/λ.
 * Negative for type II in KTP.
 * @throws RangeError where an index does not exist
 */
export function mismatch(
  index: IndexModel,
  waves: ThreeWaves,
  temperatureC: number,
  geometry: GuideGeometry,
): number {
  const { lambdaP, lambdaS, lambdaI } = waves;
  return 2 * Math.PI * (
    index.nEff(waves.polP, lambdaP, temperatureC, geometry) / lambdaP -
    index.nEff(waves.polS, lambdaS, temperatureC, geometry) / lambdaS -
    index.nEff(waves.polI, lambdaI, temperatureC, geometry) / lambdaI
  );
}

/** {@link mismatch} against temperature (°C) at fixed waves and geometry: made once, cheap to evaluate many times. */
export function mismatchOverTemperature(
  index: IndexModel,
  waves: ThreeWaves,
  geometry: GuideGeometry,
): (temperatureC: number) => number {
  const { lambdaP, lambdaS, lambdaI } = waves;
  const p = index.overTemperature(waves.polP, lambdaP, geometry);
  const s = index.overTemperature(waves.polS, lambdaS, geometry);
  const i = index.overTemperature(waves.polI, lambdaI, geometry);
  return (T) => 2 * Math.PI * (p(T) / lambdaP - s(T) / lambdaS - i(T) / lambdaI);
}
