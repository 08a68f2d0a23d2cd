// Pure: no I/O, no clock, no hidden randomness.
// Effective areas of a design's solved fields at the wavelengths of one process, as plain numbers.
import type { Polarisation, ThreeWaves } from "../../../shared/vocabulary.ts";
import { type AreaModel, canonicalProcess, processName } from "../area_model.ts";
import { designMode, geometryParameters, type SolverDesign } from "./design.ts";
import { geometryGrid, geometryNodes, SOLVER_VERSION, TABLE_GRID, type TableGrid } from "./design_table.ts";
import type { Memory } from "./eigen.ts";
import { ModesCutOff } from "./modes_cut_off.ts";
import { polynomialWeights } from "./polynomial_weights.ts";
import { threeWaveArea } from "./three_wave_area.ts";

/** Areas of one process at fixed wavelengths over the design's geometry nodes; storable. */
export interface DesignAreas {
  readonly version: number;
  readonly design: SolverDesign;
  readonly waves: ThreeWaves;
  /** A_eff in m² at each geometry node (first parameter slowest), or why there is none. */
  readonly areas: readonly number[] | { readonly reason: string };
}

/** Solves the fields of three waves at the middle of the design's temperatures, over its geometry nodes. */
export function solveAreas(
  design: SolverDesign,
  waves: ThreeWaves,
  grid: TableGrid = TABLE_GRID,
): DesignAreas {
  const T = (design.temperatureC[0] + design.temperatureC[1]) / 2;
  const memory: Memory = {};
  const areas: number[] = [];
  for (const geometry of geometryGrid(design)) {
    const mode = (pol: Polarisation, lambda: number) =>
      designMode(design, pol, lambda, T, geometry, { cells: grid.cells, memory });
    const p = mode(waves.polP, waves.lambdaP);
    const s = mode(waves.polS, waves.lambdaS);
    const same = waves.polS === waves.polI && waves.lambdaS === waves.lambdaI;
    const i = same ? s : mode(waves.polI, waves.lambdaI);
    for (const [wave, found] of [["pump", p], ["signal", s], ["idler", i]] as const) {
      if (found.cutOff) {
        const reason = `${wave}: ${found.reason}, width ${geometry.width_um} µm`;
        return { version: SOLVER_VERSION, design, waves, areas: { reason } };
      }
    }
    if (!p.cutOff && !s.cutOff && !i.cutOff) areas.push(threeWaveArea(p, s, i));
  }
  return { version: SOLVER_VERSION, design, waves, areas };
}

/**
 * Area model of one process at its wavelengths, between the geometry nodes by polynomials in the logarithm.
 * @throws RangeError from `effectiveArea`: for another process, a geometry beyond the nodes; ModesCutOff where a wave is
 * not guided
 */
export function solverAreaModel({ design, waves, areas, version }: DesignAreas): AreaModel {
  if (version !== SOLVER_VERSION) {
    throw new RangeError(`Cannot use solved areas: found version ${version}, need ${SOLVER_VERSION}`);
  }
  const held = processName(waves.polP, waves.polS, waves.polI);
  const axes = geometryNodes(design).map((nodes) => Float64Array.from(nodes));
  return {
    effectiveArea(process, geometry) {
      if (canonicalProcess(process) !== held) {
        throw new RangeError(`Cannot look up the effective area of ${process}: solved for ${held}`);
      }
      if ("reason" in areas) throw new ModesCutOff(`Cannot overlap modes: ${areas.reason}`);
      const parameters = geometryParameters(design.process);
      const weights = polynomialWeights(parameters, axes, geometry, design.geometry, null);
      return Math.exp(weights.reduce((sum, w, k) => sum + w * Math.log(areas[k]!), 0));
    },
  };
}
