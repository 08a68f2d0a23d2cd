// Pure: no I/O, no clock, no hidden randomness.
// Modes solved from fabrication parameters.
export { interpolationError } from "./check_design.ts";
export { countModes, type ModeCount } from "./count_modes.ts";
export type { CrossSection, GuideSection } from "./cross_section.ts";
export {
  designField,
  type DesignGeometry,
  designMode,
  designModeCount,
  designRemarks,
  designSection,
  PROCESS_PARAMETERS,
  type ProcessParameter,
  type SolverDesign,
  type SolverProcess,
  withProcess,
} from "./design.ts";
export { type DesignAreas, solveAreas, solverAreaModel } from "./design_area.ts";
export { type DesignOutput, solveOutput } from "./design_output.ts";
export {
  designKey,
  type DesignTable,
  designTable,
  type PolarisationTable,
  solveDesign,
  solvePolarisation,
  SOLVER_VERSION,
  TABLE_GRID,
  type TableGrid,
} from "./design_table.ts";
export {
  designsAreaModel,
  designsIndexModel,
  solvedCoupling,
  type SolvedDesigns,
  type SolvedOutput,
  solvedOutputAt,
} from "./designs_model.ts";
export { type FibreCoupling, fibreCoupling } from "./fibre_coupling.ts";
export type { GridCells, Parity } from "./guide_grid.ts";
export type { ModeField } from "./mode_field.ts";
export type { FieldKind } from "./mode_matrix.ts";
export { type ModeShape, modeShape } from "./mode_shape.ts";
export { ModesCutOff } from "./modes_cut_off.ts";
export { rubidiumRemarks, rubidiumSection } from "./rubidium_section.ts";
export { type CutOff, DEFAULT_CELLS, type SolvedMode, solveGuide, type SolveOptions } from "./solve_guide.ts";
export { type SolverIndexModel, solverIndexModel } from "./solver_index.ts";
export { threeWaveArea } from "./three_wave_area.ts";
export {
  diffusionRemarks,
  titaniumDiffusionLength,
  titaniumRemarks,
  titaniumSection,
} from "./titanium_section.ts";
export { solveWidths, type WidthScan, widthSlopes } from "./width_scan.ts";
