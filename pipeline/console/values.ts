/** What a cell of a table of output may hold. */
export type Cell = number | bigint | string | boolean | null | undefined | readonly Cell[] | {
  readonly [key: string]: Cell;
};

/**
 * A number with as many significant digits as are asked for, but never with zeros in place of digits before the decimal
 * point; whole numbers in full, since they are counts. An infinity or a NaN is named, never hidden.
 */
export function numberText(value: number, digits = 6): string {
  if (Number.isInteger(value) && Math.abs(value) < 1e15) return String(value);
  if (!Number.isFinite(value)) return String(value);
  if (Math.abs(value) >= 10 ** digits && Math.abs(value) < 1e15) return value.toFixed(0);
  return String(Number(value.toPrecision(digits)));
}

/** A cell as text on one line: missing is empty, lists and objects are JSON. */
export function cellText(cell: Cell, digits?: number): string {
  if (cell === null || cell === undefined) return "";
  if (typeof cell === "number") return numberText(cell, digits);
  if (typeof cell === "object") return visibleText(jsonText(cell, { indent: 0 }));
  return visibleText(String(cell));
}

/**
 * Text from a file, safe to print: control characters could move the cursor or hide what stands beside them, and
 * direction marks could reorder it, so they are shown as `\u001b`.
 */
export function visibleText(text: string): string {
  return text.replace(
    // deno-lint-ignore no-control-regex -- they are what is looked for
    /[\u0000-\u001f\u007f-\u009f\u2028\u2029\u200e\u200f\u202a-\u202e\u2066-\u2069]/g,
    (mark) => `\\u${mark.charCodeAt(0).toString(16).padStart(4, "0")}`,
  );
}

/** JSON of anything, keys in the order given: NaN and infinities become null, typed arrays become lists. */
export function jsonText(value: unknown, { indent = 2 } = {}): string {
  return JSON.stringify(
    value,
    (_, inner) => {
      if (typeof inner === "bigint") {
        return Number.isSafeInteger(Number(inner)) ? Number(inner) : String(inner);
      }
      if (ArrayBuffer.isView(inner) && !(inner instanceof DataView)) return Array.from(inner as Float64Array);
      return inner instanceof Map ? Object.fromEntries(inner) : inner;
    },
    indent,
  );
}
