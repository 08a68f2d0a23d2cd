// Pure: no I/O, no clock, no hidden randomness.
// A design: process parameters and geometry from which modes are solved.
import type { GuideGeometry, Polarisation } from "../../../shared/vocabulary.ts";
import { type Material, refractiveIndex } from "../../materials/mod.ts";
import type { GeometryParameter, PolarisationAxes } from "../index_model.ts";
import { propagationAxis } from "../propagation_axis.ts";
import { countModes, type ModeCount } from "./count_modes.ts";
import type { GuideSection } from "./cross_section.ts";
import type { FieldKind } from "./mode_matrix.ts";
import { rubidiumRemarks, rubidiumSection } from "./rubidium_section.ts";
import { type CutOff, type SolvedMode, solveGuide, type SolveOptions } from "./solve_guide.ts";
import { titaniumRemarks, titaniumSection } from "./titanium_section.ts";

/** Profile of the index with its process parameters; lengths in µm. */
export type SolverProcess =
  | {
    readonly profile: "titanium-diffused";
    /** Diffusion lengths sideways and in depth (1/e of the gaussian). */
    readonly diffusion_lateral_um: number;
    readonly diffusion_depth_um: number;
  }
  | {
    readonly profile: "rubidium-exchanged";
    readonly exchange_depth_um: number;
    /** Index step at the surface, per polarisation, at all wavelengths. */
    readonly index_step: { readonly TE: number; readonly TM: number };
  };

/** What differs from guide to guide of one process. */
export type DesignGeometry = { readonly width_um: number; readonly titanium_nm?: number };

/** Everything that a design's modes depend on. */
export interface SolverDesign {
  readonly material: Material;
  readonly axes: PolarisationAxes;
  readonly process: SolverProcess;
  /** Index above the surface. */
  readonly cover: number;
  /** `scalar`, or `semi-vectorial`: E across the surface solved with its jump and the crystal's anisotropy. */
  readonly field: "scalar" | "semi-vectorial";
  /** Middle of the geometries, and how far from it the table goes. */
  readonly geometry: DesignGeometry;
  readonly span: DesignGeometry;
  /** Vacuum wavelengths (m) and temperatures (°C) that the table covers. */
  readonly lambda: readonly [number, number];
  readonly temperatureC: readonly [number, number];
}

/** Process parameters that a sensitivity may be asked for, beyond those of the geometry. */
export const PROCESS_PARAMETERS = [
  "diffusion_lateral_um",
  "diffusion_depth_um",
  "exchange_depth_um",
  "index_step",
] as const;
export type ProcessParameter = typeof PROCESS_PARAMETERS[number];

/** The geometry parameters of a process. */
export function geometryParameters(
  process: SolverProcess,
): readonly (GeometryParameter & keyof DesignGeometry)[] {
  return process.profile === "titanium-diffused" ? ["width_um", "titanium_nm"] : ["width_um"];
}

/** Its process parameters. */
export function processParameters(process: SolverProcess): readonly ProcessParameter[] {
  return process.profile === "titanium-diffused"
    ? ["diffusion_lateral_um", "diffusion_depth_um"]
    : ["exchange_depth_um", "index_step"];
}

/** The design with one process parameter changed by `by`; a step changes in both polarisations. */
export function withProcess(design: SolverDesign, parameter: ProcessParameter, by: number): SolverDesign {
  const held = design.process as unknown as Record<string, number | { TE: number; TM: number }>;
  const value = held[parameter];
  if (value === undefined) {
    throw new RangeError(
      `Cannot change ${parameter}: a ${design.process.profile} guide has no such parameter`,
    );
  }
  const changed = typeof value === "number" ? value + by : { TE: value.TE + by, TM: value.TM + by };
  return { ...design, process: { ...held, [parameter]: changed } as unknown as SolverProcess };
}

const stripeOf = (process: SolverProcess & { profile: "titanium-diffused" }, geometry: GuideGeometry) => {
  if (geometry.titanium_nm === undefined) {
    throw new RangeError("Cannot diffuse a titanium stripe: titanium_nm is not known");
  }
  return {
    width: geometry.width_um * 1e-6,
    titanium: geometry.titanium_nm * 1e-9,
    lateral: process.diffusion_lateral_um * 1e-6,
    depth: process.diffusion_depth_um * 1e-6,
  };
};

/**
 * Cross-section at a vacuum wavelength (m) for a crystal of index `substrate` (default: at the temperature, °C).
 * @throws RangeError for lengths that are not positive, or a wavelength or temperature without bulk index
 */
export function designSection(
  design: SolverDesign,
  pol: Polarisation,
  lambda: number,
  temperatureC: number,
  geometry: GuideGeometry,
  substrate = refractiveIndex(design.material, design.axes[pol], lambda, temperatureC),
): GuideSection {
  const { process, cover } = design;
  if (process.profile === "titanium-diffused") {
    const axis = design.axes[pol];
    const wave = axis === "z" || axis === "e" ? "extraordinary" : "ordinary";
    return titaniumSection(stripeOf(process, geometry), wave, lambda, substrate, cover);
  }
  return rubidiumSection({
    substrate,
    cover,
    step: process.index_step[pol],
    depth: process.exchange_depth_um * 1e-6,
    width: geometry.width_um * 1e-6,
  });
}

/** How the field of a polarisation is solved: TM has E across the surface. */
export function designField(
  design: SolverDesign,
  pol: Polarisation,
  lambda: number,
  temperatureC: number,
): FieldKind {
  if (design.field === "scalar" || pol === "TE") return { kind: "scalar" };
  const along = refractiveIndex(
    design.material,
    propagationAxis(design.material, design.axes),
    lambda,
    temperatureC,
  );
  return { kind: "across", along };
}

/** Solves a mode of a design directly. Errors as {@link designSection}. */
export function designMode(
  design: SolverDesign,
  pol: Polarisation,
  lambda: number,
  temperatureC: number,
  geometry: GuideGeometry = design.geometry,
  options: Omit<SolveOptions, "field"> = {},
): SolvedMode | CutOff {
  const section = designSection(design, pol, lambda, temperatureC, geometry);
  return solveGuide(section, lambda, { ...options, field: designField(design, pol, lambda, temperatureC) });
}

/** Number of guided modes of a design, counted directly. Errors as {@link designSection}. */
export function designModeCount(
  design: SolverDesign,
  pol: Polarisation,
  lambda: number,
  temperatureC: number,
  geometry: GuideGeometry = design.geometry,
): ModeCount {
  const section = designSection(design, pol, lambda, temperatureC, geometry);
  return countModes(section, lambda, { field: designField(design, pol, lambda, temperatureC) });
}

/** Sentences about a wavelength (m) or a process that the profile's law was not published for; none inside its range. */
export function designRemarks(
  { process, geometry }: SolverDesign,
  pol: Polarisation,
  lambda: number,
): string[] {
  return process.profile === "titanium-diffused"
    ? titaniumRemarks(stripeOf(process, geometry), lambda)
    : rubidiumRemarks(process.index_step[pol], pol);
}
