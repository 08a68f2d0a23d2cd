// Pure: no I/O, no clock, no hidden randomness.

/** A smooth function tabulated once: `at` costs some twenty operations however dear the function was. */
export interface Curve {
  readonly lo: number;
  readonly hi: number;
  /** @param x inside lo…hi (a little beyond is extrapolated) */
  at(x: number): number;
}

/**
 * Tabulates `f` on `nodes` equal steps over lo…hi and interpolates with six-point Lagrange polynomials. For a wave
 * number over a few per cent of its frequency 33 nodes are exact to rounding: the error goes as (step/ω)⁶.
 * @throws RangeError for an empty or endless interval, fewer than six nodes, or a value of `f` that is not finite
 */
export function tabulate(f: (x: number) => number, lo: number, hi: number, nodes = 33): Curve {
  if (!(hi > lo && Number.isFinite(hi - lo))) {
    throw new RangeError(`Cannot tabulate over ${lo}…${hi}: need a finite interval`);
  }
  if (!Number.isSafeInteger(nodes) || nodes < 6) {
    throw new RangeError(`Cannot tabulate with ${nodes} nodes: need an integer >= 6`);
  }
  const step = (hi - lo) / (nodes - 1);
  const y = new Float64Array(nodes);
  for (let k = 0; k < nodes; k++) {
    // the last node must be `hi` itself: rounding may not carry it beyond a limit of `f`
    y[k] = f(k === nodes - 1 ? hi : lo + k * step);
    if (!Number.isFinite(y[k]!)) {
      throw new RangeError(`Cannot tabulate: found ${y[k]} at ${lo + k * step}, need finite values`);
    }
  }
  return { lo, hi, at: (x) => lagrange6(y, (x - lo) / step) };
}

/** Six-point Lagrange interpolation at fractional index `u`; the stencil stays inside the table. */
function lagrange6(y: Float64Array, u: number): number {
  const first = Math.min(Math.max(Math.floor(u) - 2, 0), y.length - 6);
  const a = u - first, b = a - 1, c = a - 2, d = a - 3, e = a - 4, f = a - 5;
  const ab = a * b, cd = c * d, ef = e * f;
  return -b * cd * ef / 120 * y[first]! + a * cd * ef / 24 * y[first + 1]! -
    ab * d * ef / 12 * y[first + 2]! + ab * c * ef / 12 * y[first + 3]! -
    ab * cd * f / 24 * y[first + 4]! + ab * cd * e / 120 * y[first + 5]!;
}

/** First derivative by the five-point rule; step `h`. */
export function slope(f: (x: number) => number, x: number, h: number): number {
  return (8 * (f(x + h) - f(x - h)) - (f(x + 2 * h) - f(x - 2 * h))) / (12 * h);
}
