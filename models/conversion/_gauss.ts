// Pure: no I/O, no clock, no hidden randomness.

/** Gauss–Legendre collocation on [0, 1]: stage k sits at node[k]; a is row-major, a[j·n + k] = ∫₀^{node j} ℓ_k. */
export interface Collocation {
  readonly count: number;
  readonly node: Float64Array;
  readonly weight: Float64Array;
  readonly a: Float64Array;
}

/**
 * The implicit Runge–Kutta method of order 2n at n Gauss nodes (J. C. Butcher, Math. Comput. 18, 50 (1964)). It keeps
 * every quadratic invariant of a differential equation to rounding, the Manley–Rowe sums among them.
 */
export function gaussCollocation(count: number): Collocation {
  const node = new Float64Array(count);
  const weight = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    let x = Math.cos(Math.PI * (k + 0.75) / (count + 0.5)); // ascending in 1 − x; refined by Newton's method
    let slope = 1;
    for (let pass = 0; pass < 8; pass++) {
      const [p, dp] = legendre(count, x);
      x -= p / dp;
      slope = dp;
    }
    node[k] = (1 - x) / 2;
    weight[k] = 1 / ((1 - x * x) * slope ** 2);
  }
  const a = new Float64Array(count * count);
  for (let j = 0; j < count; j++) {
    for (let k = 0; k < count; k++) {
      // ℓ_k has degree n − 1, so the n-point rule on [0, node j] is exact
      let sum = 0;
      for (let m = 0; m < count; m++) sum += weight[m]! * lagrange(node, k, node[j]! * node[m]!);
      a[j * count + k] = node[j]! * sum;
    }
  }
  return { count, node, weight, a };
}

/** P_n(x) and its derivative by the three-term recurrence. */
function legendre(n: number, x: number): [number, number] {
  let before = 1;
  let p = x;
  for (let k = 2; k <= n; k++) [before, p] = [p, ((2 * k - 1) * x * p - (k - 1) * before) / k];
  return [p, n * (x * p - before) / (x * x - 1)];
}

function lagrange(node: Float64Array, k: number, x: number): number {
  let product = 1;
  for (let m = 0; m < node.length; m++) {
    if (m !== k) product *= (x - node[m]!) / (node[k]! - node[m]!);
  }
  return product;
}
