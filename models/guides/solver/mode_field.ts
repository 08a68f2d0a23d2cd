// Pure: no I/O, no clock, no hidden randomness.
// A solved vector as a field on all nodes of its grid.
import { areaWeights, unknownRange } from "./axis.ts";
import type { Eigenpair } from "./eigen.ts";
import type { Parity } from "./guide_grid.ts";
import type { ModeMatrix } from "./mode_matrix.ts";

/**
 * A mode's electric field on the half x ≥ 0 of a grid: value (i, j) is field[j·x.length + i], 1/m, with ∫∫ e² dx dy = 1
 * over both halves; the other half is its mirror image with the sign of the parity. Largest value positive.
 */
export interface ModeField {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly parity: Parity;
  readonly field: Float64Array;
}

/** Values at the unknown nodes → values at all nodes, 0 where the field is held at 0. */
export function onAllNodes({ x, y, nx, ny }: ModeMatrix, values: Float64Array): Float64Array {
  const { first: x0 } = unknownRange(x);
  const { first: y0 } = unknownRange(y);
  const wide = x.nodes.length;
  const out = new Float64Array(wide * y.nodes.length);
  for (let j = 0; j < ny; j++) {
    for (let i = 0; i < nx; i++) out[(j + y0) * wide + i + x0] = values[j * nx + i]!;
  }
  return out;
}

/** A vector of one grid as start on the grid with every cell halved: between nodes, the mean of the neighbours. */
export function refinedStart(coarse: ModeMatrix, vector: Float64Array, fine: ModeMatrix): Float64Array {
  const all = onAllNodes(coarse, vector);
  const wide = coarse.x.nodes.length;
  const { first: x0 } = unknownRange(fine.x);
  const { first: y0 } = unknownRange(fine.y);
  const out = new Float64Array(fine.nx * fine.ny);
  for (let j = 0; j < fine.ny; j++) {
    const low = ((j + y0) >> 1) * wide;
    const high = ((j + y0 + 1) >> 1) * wide;
    for (let i = 0; i < fine.nx; i++) {
      const left = (i + x0) >> 1;
      const right = (i + x0 + 1) >> 1;
      out[j * fine.nx + i] = (all[low + left]! + all[low + right]! + all[high + left]! + all[high + right]!) /
        4;
    }
  }
  return out;
}

/** The electric field of an eigenpair, normalised. `acrossSurface`: the vector is H = n²E, not E. */
export function modeField(
  matrix: ModeMatrix,
  { vector }: Pick<Eigenpair, "vector">,
  parity: Parity,
  acrossSurface: boolean,
): ModeField {
  const { x, y } = matrix;
  const areas = areaWeights(x, y);
  const values = onAllNodes(matrix, vector);
  if (acrossSurface) {
    // mass/area is the node's n_s²/n²; on the surface, where E jumps, the mean of both sides.
    const mass = onAllNodes(matrix, matrix.mass);
    for (let k = 0; k < values.length; k++) values[k]! *= mass[k]! / areas[k]!;
  }
  let norm = 0;
  let peak = 0;
  for (let k = 0; k < values.length; k++) {
    norm += areas[k]! * values[k]! * values[k]!;
    if (Math.abs(values[k]!) > Math.abs(peak)) peak = values[k]!;
  }
  const scale = Math.sign(peak) / Math.sqrt(2 * norm);
  return { x: x.nodes, y: y.nodes, parity, field: values.map((e) => e * scale) };
}
