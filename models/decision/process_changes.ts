// Pure: no I/O, no clock, no hidden randomness.
// A design with one parameter of its process a little off, as a design of its own: its modes are solved anew.
import {
  type ProcessParameter,
  type SolverDesign,
  titaniumDiffusionLength,
  withProcess,
} from "../guides/mod.ts";
import type { SolverIndex } from "../../shared/schemas/platform.ts";

/** Parameters of the process that a furnace has rather than a profile: both diffusion lengths follow them. */
export const FURNACE_PARAMETERS = ["diffusion_hours", "diffusion_temperature_c"] as const;
export type FurnaceParameter = typeof FURNACE_PARAMETERS[number];

/** What of a process may be off, by how much in the unit of its name. */
export interface ProcessNudge {
  readonly parameter: ProcessParameter | FurnaceParameter;
  readonly by: number;
}

/** Small errors as they occur: 0.1 µm of a length, 0.1 h and 1 °C of a furnace, 1e-4 of an index step. */
export const PROCESS_NUDGES: readonly ProcessNudge[] = [
  { parameter: "diffusion_lateral_um", by: 0.1 },
  { parameter: "diffusion_depth_um", by: 0.1 },
  { parameter: "diffusion_hours", by: 0.1 },
  { parameter: "diffusion_temperature_c", by: 1 },
  { parameter: "exchange_depth_um", by: 0.1 },
  { parameter: "index_step", by: 1e-4 },
];

/** A design with its process changed. */
export interface ChangedDesign extends ProcessNudge {
  readonly design: SolverDesign;
}

/**
 * The design with each parameter of its process off, up and down. It holds the drawn geometry alone, which takes a
 * tenth of the time of a whole table. Time and temperature of diffusion change both lengths by the ratio that the
 * diffusivity gives, and only where the platform states them.
 * @throws RangeError where a change leaves nothing of a length
 */
export function changedDesigns(design: SolverDesign, index: SolverIndex): ChangedDesign[] {
  const span = design.geometry.titanium_nm === undefined ? { width_um: 0 } : { width_um: 0, titanium_nm: 0 };
  return PROCESS_NUDGES.flatMap(({ parameter, by: size }) =>
    [size, -size].flatMap((by): ChangedDesign[] => {
      const changed = isFurnace(parameter)
        ? diffusedOtherwise(design, index, parameter, by)
        : parameter in design.process
        ? withProcess(design, parameter, by)
        : null;
      return changed === null ? [] : [{ parameter, by, design: { ...changed, span } }];
    })
  );
}

const isFurnace = (parameter: ProcessNudge["parameter"]): parameter is FurnaceParameter =>
  (FURNACE_PARAMETERS as readonly string[]).includes(parameter);

function diffusedOtherwise(
  design: SolverDesign,
  index: SolverIndex,
  parameter: FurnaceParameter,
  by: number,
): SolverDesign | null {
  const { process } = design;
  if (process.profile !== "titanium-diffused" || index.profile !== "titanium-diffused") return null;
  if (index.diffusion === undefined) return null;
  const { hours, temperature_c } = index.diffusion;
  const ratio =
    (parameter === "diffusion_hours"
      ? titaniumDiffusionLength(hours + by, temperature_c)
      : titaniumDiffusionLength(hours, temperature_c + by)) / titaniumDiffusionLength(hours, temperature_c);
  return {
    ...design,
    process: {
      ...process,
      diffusion_lateral_um: process.diffusion_lateral_um * ratio,
      diffusion_depth_um: process.diffusion_depth_um * ratio,
    },
  };
}
