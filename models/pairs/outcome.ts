// Pure: no I/O, no clock, no hidden randomness.

/** A number, or null with the reason why there is none. */
export type Outcome =
  | { readonly value: number }
  | { readonly value: null; readonly reason: string };

/** An outcome that exists. @throws RangeError if it is not a finite number: such a number must never leave quietly */
export function given(value: number, what = "value"): Outcome {
  if (!Number.isFinite(value)) {
    throw new RangeError(`Cannot give ${what}: found ${value}, need a finite number`);
  }
  return { value };
}

/** An outcome that does not exist, and why. */
export const absent = (reason: string): Outcome => ({ value: null, reason });

/** `f` of some outcomes; absent, with the first reason, as soon as one of them is. */
export function combine(parts: readonly Outcome[], f: (...values: number[]) => number): Outcome {
  const values: number[] = [];
  for (const part of parts) {
    if (part.value === null) return part;
    values.push(part.value);
  }
  return given(f(...values));
}
