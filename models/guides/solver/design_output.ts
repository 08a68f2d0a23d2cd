// Pure: no I/O, no clock, no hidden randomness.
// What a design shows at one wavelength besides its index: its modes, their size, and what a fibre collects.
import type { Polarisation } from "../../../shared/vocabulary.ts";
import type { ModeCount } from "./count_modes.ts";
import { designMode, designModeCount, type SolverDesign } from "./design.ts";
import { SOLVER_VERSION, TABLE_GRID, type TableGrid } from "./design_table.ts";
import { fibreCoupling } from "./fibre_coupling.ts";
import { type ModeShape, modeShape } from "./mode_shape.ts";
import type { CutOff } from "./solve_guide.ts";

/** Plain numbers of the middle geometry's fundamental mode; storable. */
export interface DesignOutput {
  readonly cutOff: false;
  readonly version: number;
  /** All guided modes: more than one even mode means that light may go into another than the one computed. */
  readonly modes: ModeCount;
  readonly shape: ModeShape;
  /** Share of power that a fibre of each diameter takes at its best height, and that height's depth, m. */
  readonly fibres: readonly { readonly mfd: number; readonly value: number; readonly depth: number }[];
}

/**
 * Solves the middle geometry of a design at a vacuum wavelength (m) and temperature (°C). `fibreMfds`: diameters of
 * fibres, m.
 * @throws RangeError for a wavelength or temperature without bulk index, or a diameter that is not positive
 */
export function solveOutput(
  design: SolverDesign,
  pol: Polarisation,
  lambda: number,
  temperatureC: number,
  fibreMfds: readonly number[] = [],
  grid: TableGrid = TABLE_GRID,
): DesignOutput | CutOff {
  const mode = designMode(design, pol, lambda, temperatureC, design.geometry, { cells: grid.cells });
  if (mode.cutOff) return mode;
  return {
    cutOff: false,
    version: SOLVER_VERSION,
    modes: designModeCount(design, pol, lambda, temperatureC),
    shape: modeShape(mode),
    fibres: fibreMfds.map((mfd) => {
      const { value, depth } = fibreCoupling(mode, mfd);
      return { mfd, value, depth };
    }),
  };
}
