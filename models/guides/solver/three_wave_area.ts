// Pure: no I/O, no clock, no hidden randomness.
import { areaWeights } from "./axis.ts";
import type { ModeField } from "./mode_field.ts";
import { resample } from "./resample.ts";

/**
 * Effective area of the overlap of three solved modes, 1/|∫∫ e_p e_s e_i dx dy|² with ∫∫ e² dx dy = 1, in m². All are
 * taken on the nodes of the mode whose grid is shortest (the most confined one: beyond it the product vanishes).
 * Infinity if the product is odd, so that the overlap vanishes by symmetry.
 */
export function threeWaveArea(p: ModeField, s: ModeField, i: ModeField): number {
  const modes = [p, s, i];
  if (modes.filter(({ parity }) => parity === "odd").length % 2 === 1) return Infinity;
  const extent = ({ x }: ModeField) => x[x.length - 1]!;
  const common = modes.reduce((best, mode) => extent(mode) < extent(best) ? mode : best);
  const on = (mode: ModeField) => mode === common ? mode.field : resample(mode, common.x, common.y);
  const [ep, es, ei] = modes.map(on) as [Float64Array, Float64Array, Float64Array];
  const areas = areaWeights({ nodes: common.x }, { nodes: common.y });
  let overlap = 0;
  for (let k = 0; k < areas.length; k++) overlap += areas[k]! * ep[k]! * es[k]! * ei[k]!;
  return 1 / (2 * overlap) ** 2;
}
