// Pure: no I/O, no clock, no hidden randomness.
// A design's modes on nodes of wavelength and geometry, as plain numbers that can be stored and read back.
import type { Polarisation } from "../../../shared/vocabulary.ts";
import { chebyshevNodes } from "./chebyshev.ts";
import {
  designField,
  type DesignGeometry,
  designMode,
  designSection,
  geometryParameters,
  type ProcessParameter,
  processParameters,
  type SolverDesign,
  withProcess,
} from "./design.ts";
import type { Memory } from "./eigen.ts";
import type { GridCells } from "./guide_grid.ts";
import { responseOfMode } from "./mode_response.ts";
import type { CutOff, SolvedMode } from "./solve_guide.ts";

/** Changes whenever the numbers of a table would. */
export const SOLVER_VERSION = 2;
/** How fine a table is. */
export interface TableGrid {
  readonly cells: GridCells;
  readonly wavelengthNodes: number;
}
/** n_eff to 1e-7 at the nodes (see the convergence table), and less than that between wavelengths. */
export const TABLE_GRID: TableGrid = { cells: { x: 64, y: 100 }, wavelengthNodes: 14 };
/** Nodes in each geometry parameter: a box's n_eff bends more over its width than a diffused guide's. */
const GEOMETRY_NODES = { "titanium-diffused": 3, "rubidium-exchanged": 5 } as const;

/** One polarisation's modes. Lists run over the geometry nodes (first parameter slowest), then the wavelength nodes. */
export interface PolarisationTable {
  /** Vacuum wavelengths that the nodes span, m: the design's, cut where the weakest guide stops guiding. */
  readonly lambda: readonly [number, number];
  /** Why it ends before the design's longest wavelength, or null. */
  readonly cutOff: string | null;
  /** n_eff − n_bulk at the table's temperature. */
  readonly excess: readonly number[];
  /** ∂(n_eff − n_bulk)/∂n_bulk: what a change of temperature does. */
  readonly perBulkIndex: readonly number[];
  /** ∂n_eff/∂(process parameter), per unit of its name. */
  readonly perProcess: { readonly [parameter in ProcessParameter]?: readonly number[] };
  /** Largest error that the grid left in n_eff at a node, by extrapolation. */
  readonly gridError: number;
}

export interface DesignTable {
  readonly version: number;
  readonly design: SolverDesign;
  readonly grid: TableGrid;
  /** Temperature of the solved modes, °C. */
  readonly temperatureC: number;
  /** Nodes of each geometry parameter, in the order of `geometryParameters`. */
  readonly geometry: readonly (readonly number[])[];
  readonly polarisations: { readonly [pol in Polarisation]: PolarisationTable | { readonly reason: string } };
}

/** Text that is equal for designs with equal tables: hash it to find a stored table. */
export function designKey(design: SolverDesign, grid: TableGrid = TABLE_GRID): string {
  const sorted = (value: unknown): unknown =>
    value !== null && typeof value === "object" && !Array.isArray(value)
      ? Object.fromEntries(
        Object.entries(value).toSorted(([a], [b]) => a < b ? -1 : 1).map(([k, v]) => [k, sorted(v)]),
      )
      : value;
  return JSON.stringify([SOLVER_VERSION, GEOMETRY_NODES, sorted(grid), sorted(design)]);
}

/** Nodes of each geometry parameter over its span, middle and both ends among them; a span of 0 has the middle alone. */
export function geometryNodes({ process, geometry, span }: SolverDesign): number[][] {
  return geometryParameters(process).map((parameter) => {
    const middle = geometry[parameter];
    const half = span[parameter];
    if (!(middle !== undefined && half !== undefined && half >= 0 && middle - half > 0)) {
      throw new RangeError(
        `Cannot solve a design: found ${parameter} ${middle} ± ${half}, need a span from 0 that stays above 0`,
      );
    }
    if (half === 0) return [middle];
    return Array.from(chebyshevNodes(middle - half, middle + half, GEOMETRY_NODES[process.profile]));
  });
}

/** All combinations of the nodes, first parameter slowest. */
export function geometryGrid(design: SolverDesign): DesignGeometry[] {
  const parameters = geometryParameters(design.process);
  let all: Record<string, number>[] = [{}];
  geometryNodes(design).forEach((nodes, d) => {
    all = all.flatMap((held) => nodes.map((value) => ({ ...held, [parameters[d]!]: value })));
  });
  return all as unknown as DesignGeometry[];
}

/**
 * Solves all nodes of a design: a few seconds. A polarisation that is not guided at the shortest wavelength is left
 * out with that reason.
 * @throws RangeError for impossible parameters, or wavelengths and temperatures without bulk index
 */
export function solveDesign(design: SolverDesign, grid: TableGrid = TABLE_GRID): DesignTable {
  return designTable(design, grid, {
    TE: solvePolarisation(design, "TE", grid),
    TM: solvePolarisation(design, "TM", grid),
  });
}

/** The table of a design from its two polarisations, which may have been solved apart. */
export function designTable(
  design: SolverDesign,
  grid: TableGrid,
  polarisations: DesignTable["polarisations"],
): DesignTable {
  return {
    version: SOLVER_VERSION,
    design,
    grid,
    temperatureC: solvedAt(design),
    geometry: geometryNodes(design),
    polarisations,
  };
}

/** Temperature of the solved modes, °C. */
const solvedAt = ({ temperatureC: [low, high] }: SolverDesign): number => (low + high) / 2;

/** Solves all nodes of one polarisation of a design. Result and errors as {@link solveDesign}. */
export function solvePolarisation(
  design: SolverDesign,
  pol: Polarisation,
  grid: TableGrid = TABLE_GRID,
): PolarisationTable | { readonly reason: string } {
  const T = solvedAt(design);
  const memory: Memory = {};
  const geometries = geometryGrid(design);
  const [shortest, longest] = design.lambda;
  const modeAt = (lambda: number, geometry: DesignGeometry) =>
    designMode(design, pol, lambda, T, geometry, { cells: grid.cells, memory });
  // The first geometry is the narrowest and thinnest: the first to lose its mode.
  const weakest = (lambda: number) => confined(modeAt(lambda, geometries[0]!));
  if (!weakest(shortest)) {
    return {
      reason: `${pol} is not guided at ${nm(shortest)} nm by a guide of ${shown(geometries[0]!)} (cut-off)`,
    };
  }
  let end = longest;
  let cutOff: string | null = null;
  if (!weakest(longest)) {
    let lo = shortest;
    let hi = longest;
    while (hi - lo > 1e-9) {
      const middle = (lo + hi) / 2;
      if (weakest(middle)) lo = middle;
      else hi = middle;
    }
    end = lo;
    cutOff = `${pol} is not safely guided beyond ${nm(end)} nm by a guide of ${
      shown(geometries[0]!)
    } (cut-off)`;
  }
  const lambdas = chebyshevNodes(shortest, end, grid.wavelengthNodes);
  const size = geometries.length * lambdas.length;
  const excess = new Array<number>(size);
  const perBulkIndex = new Array<number>(size);
  const parameters = processParameters(design.process);
  const perProcess = parameters.map(() => new Array<number>(size));
  let gridError = 0;
  geometries.forEach((geometry, g) =>
    lambdas.forEach((lambda, l) => {
      const at = g * lambdas.length + l;
      const mode = modeAt(lambda, geometry);
      if (mode.cutOff) {
        throw new RangeError(`Cannot solve a design: ${pol} ${shown(geometry)}: ${mode.reason}`);
      }
      excess[at] = mode.excess;
      gridError = Math.max(gridError, mode.gridError);
      perBulkIndex[at] = bulkResponse(design, pol, T, geometry, mode);
      parameters.forEach((parameter, p) => {
        perProcess[p]![at] = processResponse(design, pol, T, geometry, mode, parameter);
      });
    })
  );
  return {
    lambda: [shortest, end],
    cutOff,
    excess,
    perBulkIndex,
    perProcess: Object.fromEntries(parameters.map((parameter, p) => [parameter, perProcess[p]!])),
    gridError,
  };
}

/** Nearer to the substrate than this the index bends too sharply over wavelength for a table. */
export const SAFE_EXCESS = 1e-4;
const confined = (mode: SolvedMode | CutOff): boolean => !mode.cutOff && mode.excess >= SAFE_EXCESS;

/** ∂(n_eff − n_bulk)/∂n_bulk of a solved mode. */
function bulkResponse(
  design: SolverDesign,
  pol: Polarisation,
  T: number,
  geometry: DesignGeometry,
  mode: SolvedMode,
): number {
  const by = 1e-3;
  const field = designField(design, pol, mode.lambda, T);
  const at = (change: number) =>
    designSection(design, pol, mode.lambda, T, geometry, mode.substrate + change);
  const slope = responseOfMode(mode, at(-by), at(by), field) / (2 * by);
  return (mode.substrate + slope / 2) / mode.nEff - 1;
}

/** ∂n_eff/∂(process parameter) of a solved mode. */
function processResponse(
  design: SolverDesign,
  pol: Polarisation,
  T: number,
  geometry: DesignGeometry,
  mode: SolvedMode,
  parameter: ProcessParameter,
): number {
  const by = parameter === "index_step" ? 1e-5 : 1e-3;
  const field = designField(design, pol, mode.lambda, T);
  const at = (change: number) =>
    designSection(withProcess(design, parameter, change), pol, mode.lambda, T, geometry);
  return responseOfMode(mode, at(-by), at(by), field) / (2 * by) / (2 * mode.nEff);
}

const nm = (lambda: number) => Number((lambda * 1e9).toFixed(1));
const shown = (geometry: DesignGeometry) =>
  Object.entries(geometry).map(([k, v]) => `${k} ${Number(v.toPrecision(6))}`).join(", ");
