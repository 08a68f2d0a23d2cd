// Pure: no I/O, no clock, no hidden randomness.
// Polynomial interpolation over a few geometry nodes, as weights on the flattened grid.
import type { GuideGeometry } from "../../../shared/vocabulary.ts";
import { insideAxis } from "../_node_axis.ts";
import type { GeometryParameter, NominalGeometry } from "../index_model.ts";

/** Writes the weights of the polynomial through all nodes at x (or of its slope there) into `out`. */
export function lagrangeWeights(
  nodes: Float64Array,
  x: number,
  derivative: 0 | 1,
  out: Float64Array,
): Float64Array {
  const n = nodes.length;
  for (let k = 0; k < n; k++) {
    let value = 1;
    let slope = 0;
    for (let m = 0; m < n; m++) {
      if (m === k) continue;
      const scale = 1 / (nodes[k]! - nodes[m]!);
      slope = (slope * (x - nodes[m]!) + value) * scale; // product rule
      value *= (x - nodes[m]!) * scale;
    }
    out[k] = derivative === 0 ? value : slope;
  }
  return out;
}

/**
 * Weights over a grid of geometry nodes (first parameter slowest), or those of the derivative along one parameter. A
 * parameter that `geometry` does not state is taken from `nominal`.
 * @throws RangeError beyond the nodes, naming parameter and limits
 */
export function polynomialWeights(
  parameters: readonly GeometryParameter[],
  axes: readonly Float64Array[],
  geometry: GuideGeometry,
  nominal: NominalGeometry,
  along: GeometryParameter | null,
): Float64Array {
  let weights = Float64Array.of(1);
  for (let d = 0; d < parameters.length; d++) {
    const parameter = parameters[d]!;
    const axis = axes[d]!;
    const x = insideAxis(axis, geometry[parameter] ?? nominal[parameter] ?? NaN, parameter);
    const own = lagrangeWeights(axis, x, parameter === along ? 1 : 0, new Float64Array(axis.length));
    const next = new Float64Array(weights.length * own.length);
    for (let a = 0; a < weights.length; a++) {
      for (let b = 0; b < own.length; b++) next[a * own.length + b] = weights[a]! * own[b]!;
    }
    weights = next;
  }
  return weights;
}
