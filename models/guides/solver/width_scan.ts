// Pure: no I/O, no clock, no hidden randomness.
// How the mismatch of a process follows the drawn width, far beyond the span of a design's table.
import type { Polarisation, ThreeWaves } from "../../../shared/vocabulary.ts";
import { chebyshevCoefficients, chebyshevDerivative, chebyshevNodes, chebyshevSum } from "./chebyshev.ts";
import { designMode, type SolverDesign } from "./design.ts";
import { SAFE_EXCESS, SOLVER_VERSION, TABLE_GRID, type TableGrid } from "./design_table.ts";
import type { Memory } from "./eigen.ts";

/** Part of Δβ that the guide makes, Σ ±2π(n_eff − n_bulk)/λ in 1/m, at Chebyshev nodes of the width. Storable. */
export interface WidthScan {
  readonly version: number;
  /** First and last node, µm. */
  readonly widths_um: readonly [number, number];
  readonly guided: readonly number[];
  /** Why there are no narrower widths, or none at all (then `guided` is empty); null where all were guided. */
  readonly cutOff: string | null;
}

/** Polynomials through so many nodes hold ∂Δβ/∂width over a factor of four in width to 3e-4, tried on both profiles. */
const NODES = 16;

/**
 * Solves the three modes at all nodes of a width range (µm), at the temperature of the design's tables; everything else
 * as in the design. The range is cut where a wave stops being guided safely.
 * @throws RangeError for impossible parameters, or wavelengths and temperatures without bulk index
 */
export function solveWidths(
  design: SolverDesign,
  waves: ThreeWaves,
  [low, high]: readonly [number, number],
  grid: TableGrid = TABLE_GRID,
): WidthScan {
  const T = (design.temperatureC[0] + design.temperatureC[1]) / 2;
  const memory: Memory = {};
  const same = waves.polS === waves.polI && waves.lambdaS === waves.lambdaI;
  const arms: readonly (readonly [Polarisation, number, number])[] = [
    [waves.polP, waves.lambdaP, 1],
    [waves.polS, waves.lambdaS, same ? -2 : -1],
    ...(same ? [] : [[waves.polI, waves.lambdaI, -1] as const]),
  ];
  const excess = (pol: Polarisation, lambda: number, width_um: number): number | null => {
    const geometry = { ...design.geometry, width_um };
    const mode = designMode(design, pol, lambda, T, geometry, { cells: grid.cells, memory });
    return mode.cutOff || mode.excess < SAFE_EXCESS ? null : mode.excess;
  };
  const unguided = (width_um: number) => arms.find(([pol, lambda]) => excess(pol, lambda, width_um) === null);
  const reason = ([pol, lambda]: readonly [Polarisation, number, number], width_um: number) =>
    `${pol} is not safely guided at ${Number((lambda * 1e9).toFixed(1))} nm by widths below ${
      Number(width_um.toFixed(2))
    } µm (cut-off)`;
  let from = low;
  let cutOff: string | null = null;
  const lost = unguided(low);
  if (lost !== undefined) {
    const never = unguided(high);
    if (never !== undefined) {
      return { version: SOLVER_VERSION, widths_um: [low, high], guided: [], cutOff: reason(never, high) };
    }
    let hi = high;
    let last = lost;
    while (hi - from > 0.01) {
      const middle = (from + hi) / 2;
      const found = unguided(middle);
      if (found === undefined) hi = middle;
      else [from, last] = [middle, found];
    }
    from = hi;
    cutOff = reason(last, from);
  }
  const guided = Array.from(chebyshevNodes(from, high, NODES), (width_um) => {
    let sum = 0;
    for (const [pol, lambda, sign] of arms) {
      sum += sign * 2 * Math.PI / lambda * excess(pol, lambda, width_um)!;
    }
    return sum;
  });
  return { version: SOLVER_VERSION, widths_um: [from, high], guided, cutOff };
}

/** ∂Δβ/∂width in 1/m per µm, or its slope in turn, at a width (µm) within the scan. */
export function widthSlopes(
  scan: WidthScan,
): { slope(width_um: number): number; curvature(width_um: number): number } {
  const [from, to] = scan.widths_um;
  const scale = 2 / (to - from);
  const first = chebyshevDerivative(chebyshevCoefficients(scan.guided));
  const second = chebyshevDerivative(first);
  const at = (c: Float64Array, width_um: number) => chebyshevSum(c, (2 * width_um - from - to) / (to - from));
  return {
    slope: (width_um) => at(first, width_um) * scale,
    curvature: (width_um) => at(second, width_um) * scale * scale,
  };
}
