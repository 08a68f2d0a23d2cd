// Pure: no I/O, no clock, no hidden randomness.
import { designMode, geometryParameters } from "./design.ts";
import type { DesignTable } from "./design_table.ts";
import type { Memory } from "./eigen.ts";
import { solverIndexModel } from "./solver_index.ts";

/** Places of the check, as shares of the wavelength range, and signs of the geometry's offset. */
const PLACES = [[0.13, 1], [0.48, -1], [0.86, 1]] as const;

/**
 * What interpolation adds to a table's error: the largest difference in n_eff from modes solved between its nodes, at
 * both ends of its temperatures and half-way to the ends of its geometry. A share of a second per polarisation.
 */
export function interpolationError(table: DesignTable): number {
  const { design } = table;
  const model = solverIndexModel(table);
  const memory: Memory = {};
  let worst = 0;
  for (const pol of ["TE", "TM"] as const) {
    const solved = table.polarisations[pol];
    if ("reason" in solved) continue;
    const [lo, hi] = solved.lambda;
    for (const [share, sign] of PLACES) {
      const lambda = lo + share * (hi - lo);
      const geometry: Record<string, number> = { ...design.geometry };
      for (const parameter of geometryParameters(design.process)) {
        geometry[parameter]! += sign * design.span[parameter]! / 2;
      }
      const at = { ...design.geometry, ...geometry };
      const T = design.temperatureC[sign === 1 ? 1 : 0];
      const mode = designMode(design, pol, lambda, T, at, { cells: table.grid.cells, memory });
      if (!mode.cutOff) worst = Math.max(worst, Math.abs(model.nEff(pol, lambda, T, at) - mode.nEff));
    }
  }
  return worst;
}
