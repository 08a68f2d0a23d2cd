import type { Target } from "./style.ts";

// 1 of a unit in the quantity's SI unit, and where its zero lies.
const UNITS: ReadonlyMap<string, { of: "length" | "temperature"; size: number; zero: number }> = new Map([
  ["nm", { of: "length", size: 1e-9, zero: 0 }],
  ["um", { of: "length", size: 1e-6, zero: 0 }],
  ["mm", { of: "length", size: 1e-3, zero: 0 }],
  ["cm", { of: "length", size: 1e-2, zero: 0 }],
  ["m", { of: "length", size: 1, zero: 0 }],
  ["k", { of: "temperature", size: 1, zero: 0 }],
  ["c", { of: "temperature", size: 1, zero: 273.15 }],
]);

/**
 * A heading such as `len [cm]`, or a cell of the units row, states a unit. When it is one of those known here and what
 * lot.json does with it does not lead to the column's unit, the sentence says so; null when it does, or nothing is known.
 */
export function unitContradiction(stated: string, target: Target): string | null {
  const unit = UNITS.get(fold(bracketed(stated) ?? stated));
  const suffix = /_(nm|um|mm|c)$/.exec(target.to)?.[1];
  const column = suffix === undefined ? undefined : UNITS.get(suffix);
  if (unit === undefined || column === undefined || unit.of !== column.of) return null;
  const times = unit.size / column.size;
  const plus = (unit.zero - column.zero) / column.size;
  const close = (a: number, b: number) => Math.abs(a - b) <= 1e-6 * Math.max(1, Math.abs(b));
  if (close(target.times / times, 1) && close(target.plus, plus)) return null;
  const clean = (x: number) => Number(x.toPrecision(9));
  const need = [
    ...(close(times, 1) ? [] : [`"times": ${clean(times)}`]),
    ...(close(plus, 0) ? [] : [`"plus": ${clean(plus)}`]),
  ];
  return `states its unit as ${bracketed(stated) ?? stated}, which "${target.to}" needs ${
    need.length === 0 ? 'without "times" and "plus"' : need.join(" and ")
  } for`;
}

/** Text in the last brackets: `T [K]` → `K`, `len (cm)` → `cm`. */
const bracketed = (heading: string): string | undefined =>
  /[[(]\s*([^[\]()]+?)\s*[\])]\s*$/.exec(heading)?.[1];

const fold = (unit: string): string =>
  unit.trim().replace(/[µμ]/g, "u").replace(/^(°|deg\s?|degrees?\s?)c$/i, "c").replace(/^°k$/i, "k")
    .replace(/^(K|C)$/, (u) => u.toLowerCase());
