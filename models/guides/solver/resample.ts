// Pure: no I/O, no clock, no hidden randomness.
// A solved field between its nodes: cubic through the four nodes around, the mirror image used at the middle.
import type { ModeField } from "./mode_field.ts";

/** Four neighbouring nodes and their weights; no weights beyond the grid, where the field is 0. */
interface Stencil {
  readonly places: readonly [number, number, number, number];
  readonly weights: readonly [number, number, number, number] | null;
}

/** Node of a stretched list that also has the mirror images of the first nodes, as place ≥ 0 and sign. */
function stencil(nodes: Float64Array, at: number, mirror: 1 | -1 | 0): Stencil {
  const last = nodes.length - 1;
  if (at < nodes[0]! || at > nodes[last]!) return { places: [0, 0, 0, 0], weights: null };
  let lo = 0;
  let hi = last;
  while (hi - lo > 1) {
    const middle = (lo + hi) >> 1;
    if (at >= nodes[middle]!) lo = middle;
    else hi = middle;
  }
  const lowest = mirror === 0 ? 0 : -1;
  const first = Math.min(Math.max(lo - 1, lowest), last - 3);
  const raw = [first, first + 1, first + 2, first + 3];
  const x = raw.map((k) => k < 0 ? -nodes[-k]! : nodes[k]!);
  const weights = raw.map((k, a) => {
    let w = k < 0 ? mirror : 1;
    for (let b = 0; b < 4; b++) if (b !== a) w *= (at - x[b]!) / (x[a]! - x[b]!);
    return w;
  });
  return {
    places: raw.map(Math.abs) as [number, number, number, number],
    weights: weights as [number, number, number, number],
  };
}

/** The field at every (x, y), x running fastest; x may be negative. Beyond the grid it is 0. */
export function resample(mode: ModeField, xs: ArrayLike<number>, ys: ArrayLike<number>): Float64Array {
  const { x, y, field, parity } = mode;
  const wide = x.length;
  const sign = parity === "even" ? 1 : -1;
  const across = Array.from(xs, (at) => ({ ...stencil(x, Math.abs(at), sign), side: at < 0 ? sign : 1 }));
  const out = new Float64Array(xs.length * ys.length);
  for (let j = 0; j < ys.length; j++) {
    const down = stencil(y, ys[j]!, 0);
    if (down.weights === null) continue;
    for (let i = 0; i < across.length; i++) {
      const { places, weights, side } = across[i]!;
      if (weights === null) continue;
      let sum = 0;
      for (let b = 0; b < 4; b++) {
        const row = down.places[b]! * wide;
        let line = 0;
        for (let a = 0; a < 4; a++) line += weights[a]! * field[row + places[a]!]!;
        sum += down.weights[b]! * line;
      }
      out[j * across.length + i] = side * sum;
    }
  }
  return out;
}

/** The field at one place. */
export const fieldAt = (mode: ModeField, x: number, y: number): number => resample(mode, [x], [y])[0]!;
