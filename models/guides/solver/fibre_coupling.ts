// Pure: no I/O, no clock, no hidden randomness.
import { nodeWeights } from "./axis.ts";
import type { ModeField } from "./mode_field.ts";
import { highest } from "./mode_shape.ts";

/** Power coupled between a guide's mode and a fibre's, without reflections. */
export interface FibreCoupling {
  /** Share of power at the best height of the fibre, in the middle sideways. */
  readonly value: number;
  /** Depth of the fibre's axis below the surface at that height, m. */
  readonly depth: number;
  /** The same share with the axis elsewhere: sideways from the middle and below the surface, m. */
  at(x: number, depth: number): number;
}

/**
 * Overlap |∫∫ e·g dx dy|² of a solved mode with a fibre's Gaussian mode of diameter `mfd` (m, 1/e² of the intensity).
 * @throws RangeError unless the diameter is positive
 */
export function fibreCoupling(mode: ModeField, mfd: number): FibreCoupling {
  if (!(mfd > 0 && mfd < Infinity)) {
    throw new RangeError(`Cannot couple to a fibre: found mode-field diameter ${mfd} m, need more than 0`);
  }
  const { x, y, field, parity } = mode;
  const w = mfd / 2;
  const scale = (2 / Math.PI) ** 0.25 / Math.sqrt(w); // ∫g² = 1 per axis
  const g = (s: number) => scale * Math.exp(-((s / w) ** 2));
  const wx = nodeWeights(x);
  const wy = nodeWeights(y);
  const sign = parity === "even" ? 1 : -1;
  /** ∫ e·g dx at every height. */
  const across = (x0: number) =>
    y.map((_, j) => {
      let sum = 0;
      for (let i = 0; i < x.length; i++) {
        sum += wx[i]! * field[j * x.length + i]! * (g(x[i]! - x0) + sign * g(-x[i]! - x0));
      }
      return sum;
    });
  const down = (lines: Float64Array, depth: number) => {
    let sum = 0;
    for (let j = 0; j < y.length; j++) sum += wy[j]! * lines[j]! * g(y[j]! - depth);
    return sum * sum;
  };
  const middle = across(0);
  // The best height on a coarse list, then between its neighbours.
  const step = w / 8;
  let best = 0;
  for (let depth = -2 * w; depth <= y[y.length - 1]!; depth += step) {
    if (down(middle, depth) > down(middle, best)) best = depth;
  }
  const depth = highest((d) => down(middle, d), best - step, best + step);
  return { value: down(middle, depth), depth, at: (x0, d) => down(across(x0), d) };
}
