// Pure: no I/O, no clock, no hidden randomness.
// Polynomial interpolation over a few geometry nodes, as weights on the flattened grid.
import type { GuideGeometry } from "../../../shared/vocabulary.ts";
import { insideAxis } from "../_node_axis.ts";
import type { Corners } from "../_grid.ts";
import type { GeometryParameter, NominalGeometry } from "../index_model.ts";

/** Weights of the polynomial through all nodes at x (or of its slope there). */
export function lagrangeWeights(nodes: Float64Array, x: number, derivative: 0 | 1): number[] {
  return Array.from(nodes, (at, k) => {
    const others = nodes.filter((_, m) => m !== k);
    const scale = others.reduce((product, other) => product * (at - other), 1);
    const without = (skip: number) =>
      others.reduce((product, other, m) => m === skip ? product : product * (x - other), 1);
    return (derivative === 0 ? without(-1) : others.reduce((sum, _, m) => sum + without(m), 0)) / scale;
  });
}

/**
 * Weights over a grid of geometry nodes (first parameter slowest), or those of the derivative along one parameter. A
 * parameter that `geometry` does not state is taken from `nominal`.
 * @throws RangeError beyond the nodes, naming parameter and limits
 */
export function polynomialCorners(
  parameters: readonly GeometryParameter[],
  axes: readonly Float64Array[],
  geometry: GuideGeometry,
  nominal: NominalGeometry,
  along: GeometryParameter | null,
): Corners {
  let weights = [1];
  parameters.forEach((parameter, d) => {
    const x = insideAxis(axes[d]!, geometry[parameter] ?? nominal[parameter] ?? NaN, parameter);
    const own = lagrangeWeights(axes[d]!, x, parameter === along ? 1 : 0);
    weights = weights.flatMap((held) => own.map((w) => held * w));
  });
  return { offsets: weights.map((_, k) => k), weights };
}
