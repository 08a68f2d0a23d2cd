// Pure: no I/O, no clock, no hidden randomness.
import type { GuideSection } from "./cross_section.ts";
import { type Memory, modesAbove } from "./eigen.ts";
import { gridAxes, type GridCells, planGrid } from "./guide_grid.ts";
import { type FieldKind, modeMatrix } from "./mode_matrix.ts";
import { FARTHEST } from "./solve_guide.ts";

/** Guided modes by their symmetry sideways. */
export interface ModeCount {
  readonly even: number;
  readonly odd: number;
}

const CELLS: GridCells = { x: 64, y: 100 };

/**
 * Number of guided modes at a vacuum wavelength (m): eigenvalues above the substrate, from the inertia of one
 * factorisation each. A mode within about 3e-6 of the substrate's index may be missed: it does not fit the grid.
 */
export function countModes(
  section: GuideSection,
  lambda: number,
  options: { field?: FieldKind; memory?: Memory; cells?: GridCells } = {},
): ModeCount {
  const { field, memory = {}, cells = CELLS } = options;
  const count = (parity: "even" | "odd") => {
    const { x, y } = gridAxes(planGrid(section, lambda, parity, cells, FARTHEST), 4);
    return modesAbove(modeMatrix(section, x, y, lambda, field), 0, memory);
  };
  return { even: count("even"), odd: count("odd") };
}
