// Pure: no I/O, no clock, no hidden randomness.
// Where a mode's intensity is highest and how wide it is there.
import type { ModeField } from "./mode_field.ts";
import { fieldAt } from "./resample.ts";

/** Widths of the intensity along the lines through its maximum, m. */
export interface ModeShape {
  /** Place of the maximum: x ≥ 0 from the middle, y below the surface. */
  readonly peakX: number;
  readonly peakY: number;
  /** Mode-field diameters: full widths at 1/e² of the intensity, outermost crossings. */
  readonly mfdX: number;
  readonly mfdY: number;
  /** Full widths at half of the intensity. */
  readonly fwhmX: number;
  readonly fwhmY: number;
}

/** Shape of a solved mode. An odd mode's widths along x span both of its lobes. */
export function modeShape(mode: ModeField): ModeShape {
  const { x, y, field } = mode;
  let at = 0;
  for (let k = 1; k < field.length; k++) if (field[k]! > field[at]!) at = k;
  const i = at % x.length;
  const j = Math.floor(at / x.length);
  let peakX = x[i]!;
  let peakY = y[j]!;
  for (let round = 0; round < 2; round++) {
    if (i > 0) peakX = highest((s) => fieldAt(mode, s, peakY), x[i - 1]!, x[Math.min(i + 1, x.length - 1)]!);
    peakY = highest(
      (s) => fieldAt(mode, peakX, s),
      y[Math.max(j - 1, 0)]!,
      y[Math.min(j + 1, y.length - 1)]!,
    );
  }
  const top = fieldAt(mode, peakX, peakY) ** 2;
  const alongX = (share: number) => {
    const edge = outermost((s) => fieldAt(mode, s, peakY) ** 2 - share * top, x, x.length - 1, -1);
    return 2 * edge;
  };
  const alongY = (share: number) => {
    const excess = (s: number) => fieldAt(mode, peakX, s) ** 2 - share * top;
    return outermost(excess, y, y.length - 1, -1) - outermost(excess, y, 0, 1);
  };
  const MFD = Math.exp(-2);
  return { peakX, peakY, mfdX: alongX(MFD), mfdY: alongY(MFD), fwhmX: alongX(0.5), fwhmY: alongY(0.5) };
}

/** Place of the maximum of a function with one maximum in [lo, hi], by golden section. */
export function highest(f: (s: number) => number, lo: number, hi: number): number {
  const golden = (Math.sqrt(5) - 1) / 2;
  let a = hi - golden * (hi - lo);
  let b = lo + golden * (hi - lo);
  let fa = f(a);
  let fb = f(b);
  for (let step = 0; step < 60; step++) {
    if (fa > fb) {
      hi = b;
      [b, fb] = [a, fa];
      a = hi - golden * (hi - lo);
      fa = f(a);
    } else {
      lo = a;
      [a, fa] = [b, fb];
      b = lo + golden * (hi - lo);
      fb = f(b);
    }
  }
  return (lo + hi) / 2;
}

/** First zero met from node `from` in the given direction, where f turns positive; bisected between nodes. */
function outermost(f: (s: number) => number, nodes: Float64Array, from: number, direction: 1 | -1): number {
  let k = from;
  while (k + direction >= 0 && k + direction < nodes.length && f(nodes[k + direction]!) < 0) k += direction;
  let outside = nodes[k]!;
  let inside = nodes[k + direction] ?? outside;
  for (let step = 0; step < 60; step++) {
    const middle = (outside + inside) / 2;
    if (f(middle) < 0) outside = middle;
    else inside = middle;
  }
  return (outside + inside) / 2;
}
