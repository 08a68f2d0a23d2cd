// Pure: no I/O, no clock, no hidden randomness.
// Chebyshev interpolation of a smooth function on an interval (L. N. Trefethen, Approximation Theory and Approximation
// Practice (2013), ch. 2, 3): nodes with both ends, coefficients, values and slopes.

/** `count` nodes from lo to hi, ascending, denser towards the ends. */
export function chebyshevNodes(lo: number, hi: number, count: number): Float64Array {
  const nodes = Float64Array.from(
    { length: count },
    (_, k) => (lo + hi) / 2 - (hi - lo) / 2 * Math.cos(Math.PI * k / (count - 1)),
  );
  nodes[0] = lo;
  nodes[count - 1] = hi;
  return nodes;
}

/** Coefficients c of Σ c_m T_m(t), t from −1 at the first node to 1 at the last, through values at the nodes. */
export function chebyshevCoefficients(values: ArrayLike<number>): Float64Array {
  const n = values.length - 1;
  return Float64Array.from({ length: n + 1 }, (_, m) => {
    let sum = 0;
    for (let k = 0; k <= n; k++) {
      const half = k === 0 || k === n ? 0.5 : 1;
      sum += half * values[k]! * Math.cos(Math.PI * m * (n - k) / n);
    }
    return sum * (m === 0 || m === n ? 1 : 2) / n;
  });
}

/** Coefficients of the derivative in t. */
export function chebyshevDerivative(c: Float64Array): Float64Array {
  const d = new Float64Array(c.length);
  for (let m = c.length - 2; m >= 0; m--) d[m] = (m + 2 < c.length ? d[m + 2]! : 0) + 2 * (m + 1) * c[m + 1]!;
  d[0]! /= 2;
  return d;
}

/** Σ c_m T_m(t) by Clenshaw's recurrence, over `count` coefficients from `start`. */
export function chebyshevSum(c: Float64Array, t: number, start = 0, count = c.length): number {
  let b1 = 0;
  let b2 = 0;
  for (let m = start + count - 1; m > start; m--) {
    const b = c[m]! + 2 * t * b1 - b2;
    b2 = b1;
    b1 = b;
  }
  return c[start]! + t * b1 - b2;
}
