// Pure: no I/O, no clock, no hidden randomness.
import {
  diffusionRemarks,
  type SolverDesign,
  type SolverProcess,
  titaniumDiffusionLength,
} from "../guides/mod.ts";
import type { Platform, SolverIndex } from "../../shared/schemas/platform.ts";
import { nm } from "../../shared/units.ts";

/** A narrow guide's table goes no farther than this share of its drawn width. */
const WIDEST_SPAN = 0.5;

/**
 * The design whose modes a platform's guides of one drawn width (µm) have.
 * @throws RangeError for a diffusion at or below absolute zero
 */
export function platformDesign(
  { material, axes }: Pick<Platform, "material" | "axes">,
  index: SolverIndex,
  drawn_um: number,
): SolverDesign {
  const { cover, field, wavelength_nm: [shortest, longest], temperature_c, span } = index;
  const width_um = Math.min(span.width_um, WIDEST_SPAN * drawn_um);
  const common = {
    material,
    axes,
    process: processOf(index),
    cover,
    field,
    lambda: [nm(shortest), nm(longest)] as const,
    temperatureC: temperature_c,
  };
  return index.profile === "titanium-diffused"
    ? {
      ...common,
      geometry: { width_um: drawn_um, titanium_nm: index.nominal.titanium_nm },
      span: { width_um, titanium_nm: index.span.titanium_nm },
    }
    : { ...common, geometry: { width_um: drawn_um }, span: { width_um } };
}

/** Remarks on process parameters that are estimates, or beyond what their law was published for. */
export function processRemarks(index: SolverIndex): string[] {
  if (index.profile !== "titanium-diffused" || index.diffusion === undefined) return [];
  if (index.diffusion_lateral_um !== undefined) return []; // lengths are given: time and temperature shift them only
  const { hours, temperature_c } = index.diffusion;
  const length = titaniumDiffusionLength(hours, temperature_c) * 1e6;
  return [
    `estimated_diffusion: lengths of ${
      length.toFixed(2)
    } µm from ${hours} h at ${temperature_c} °C, by constants from ` +
    `memory; give measured diffusion_lateral_um and diffusion_depth_um instead`,
    ...diffusionRemarks(temperature_c),
  ];
}

function processOf(index: SolverIndex): SolverProcess {
  if (index.profile === "rubidium-exchanged") {
    const { profile, exchange_depth_um, index_step } = index;
    return { profile, exchange_depth_um, index_step };
  }
  const { profile, diffusion, diffusion_lateral_um, diffusion_depth_um } = index;
  const length = diffusion === undefined
    ? NaN
    : titaniumDiffusionLength(diffusion.hours, diffusion.temperature_c) * 1e6;
  return {
    profile,
    diffusion_lateral_um: diffusion_lateral_um ?? length,
    diffusion_depth_um: diffusion_depth_um ?? length,
  };
}
