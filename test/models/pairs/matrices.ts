// Joint amplitudes given as functions, and the published values that they are checked against.
import type { ComplexMatrix } from "../../../models/pairs/mod.ts";

export const PUBLISHED = JSON.parse(
  Deno.readTextFileSync(new URL("../../../fixtures/check-values/pairs.json", import.meta.url)),
);

/** f on the midpoints of n × n cells over ±half in both directions; cells below 1e-12 are left dark. */
export function sampled(
  n: number,
  half: number,
  f: (x: number, y: number) => readonly [number, number],
): ComplexMatrix {
  const re = new Float64Array(n * n);
  const im = new Float64Array(n * n);
  const from = new Int32Array(n).fill(n);
  const to = new Int32Array(n);
  const h = 2 * half / n;
  for (let j = 0; j < n; j++) {
    for (let l = 0; l < n; l++) {
      const [a, b] = f(-half + (j + 0.5) * h, -half + (l + 0.5) * h);
      if (Math.hypot(a, b) < 1e-12) continue;
      re[j * n + l] = a;
      im[j * n + l] = b;
      from[j] = Math.min(from[j]!, l);
      to[j] = l + 1;
    }
    if (to[j] === 0) from[j] = 0;
  }
  return { rows: n, cols: n, re, im, from, to };
}

/** exp(−re)·e^{−i·im}. */
export const expMinus = (re: number, im: number): [number, number] => [
  Math.exp(-re) * Math.cos(im),
  -Math.exp(-re) * Math.sin(im),
];

/** A matrix of any shape from seeded numbers. */
export function random(rows: number, cols: number, uniform: () => number): ComplexMatrix {
  const fill = () => Float64Array.from({ length: rows * cols }, () => uniform() - 0.5);
  return { rows, cols, re: fill(), im: fill() };
}
