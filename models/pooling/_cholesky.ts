// Pure: no I/O, no clock, no hidden randomness.

// The likelihood factors matrices of one to ten rows some thousand times: flat arrays, no objects.

/**
 * Lower Cholesky factor of a symmetric n × n matrix, row-major, in place; only its lower triangle is read and written.
 * @returns ln of the determinant; NaN unless the matrix is positive definite to rounding
 */
export function factorInPlace(a: Float64Array, n: number): number {
  let logDet = 0;
  for (let j = 0; j < n; j++) {
    const before = a[j * n + j]!;
    let pivot = before;
    for (let k = 0; k < j; k++) pivot -= a[j * n + k]! ** 2;
    if (!(pivot > 1e-14 * before)) return NaN;
    const root = Math.sqrt(pivot);
    a[j * n + j] = root;
    logDet += 2 * Math.log(root);
    for (let i = j + 1; i < n; i++) {
      let s = a[i * n + j]!;
      for (let k = 0; k < j; k++) s -= a[i * n + k]! * a[j * n + k]!;
      a[i * n + j] = s / root;
    }
  }
  return logDet;
}

/** Solves L x = b in place. */
export function forwardInPlace(lower: Float64Array, n: number, b: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let s = b[i]!;
    for (let k = 0; k < i; k++) s -= lower[i * n + k]! * b[k]!;
    b[i] = s / lower[i * n + i]!;
  }
}

/** Solves Lᵀ x = b in place. */
export function backwardInPlace(lower: Float64Array, n: number, b: Float64Array): void {
  for (let i = n - 1; i >= 0; i--) {
    let s = b[i]!;
    for (let k = i + 1; k < n; k++) s -= lower[k * n + i]! * b[k]!;
    b[i] = s / lower[i * n + i]!;
  }
}
