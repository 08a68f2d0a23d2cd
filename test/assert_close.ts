import { AssertionError } from "node:assert";

/** Fails unless |actual − expected| ≤ abs + rel·|expected|; a NaN never passes. */
export function assertClose(
  actual: number,
  expected: number,
  tolerance: { readonly rel?: number; readonly abs?: number },
  what = "value",
): void {
  const allowed = (tolerance.abs ?? 0) + (tolerance.rel ?? 0) * Math.abs(expected);
  const difference = Math.abs(actual - expected);
  if (difference <= allowed) return;
  throw new AssertionError({
    message: `${what}: got ${actual}, expected ${expected}, off by ${difference}, allowed ${allowed}`,
    actual,
    expected,
    operator: "assertClose",
  });
}
