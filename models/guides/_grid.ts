// Pure: no I/O, no clock, no hidden randomness.
// Scattered table rows → a full rectangular grid, or an error that names the node that is missing.
import type { GuideGeometry } from "../../shared/vocabulary.ts";
import { hermiteWeights, insideAxis } from "./_node_axis.ts";
import { GEOMETRY_PARAMETERS, type GeometryParameter, type NominalGeometry } from "./index_model.ts";

/** A full grid. `values` is row-major over the axes in their order: the last axis runs fastest. */
export interface Grid {
  readonly axes: readonly Float64Array[];
  readonly values: Float64Array;
}

/**
 * Sorts rows into a grid over the columns named. `what` names the table in errors.
 * @throws RangeError for no rows, an empty or unusable cell, a missing node, a node given twice with different values
 */
export function gridOf(
  rows: readonly object[],
  columns: readonly string[],
  valueColumn: string,
  what: string,
): Grid {
  if (rows.length === 0) throw new RangeError(`Cannot use ${what}: it has no rows`);
  const cell = (row: object, column: string): number => {
    const value = (row as Record<string, unknown>)[column];
    if (typeof value === "number" && Number.isFinite(value)) return value;
    throw new RangeError(
      `Cannot use ${what}: found ${value === undefined ? "no value" : String(value)} in column ${column} of ${
        JSON.stringify(row)
      }, need a number in every row`,
    );
  };
  const axes = columns.map((column) =>
    Float64Array.from(new Set(rows.map((row) => cell(row, column)))).sort()
  );
  const places = axes.map((axis) => new Map(Array.from(axis, (x, k) => [x, k] as const)));
  const values = new Float64Array(axes.reduce((product, axis) => product * axis.length, 1)).fill(NaN);
  for (const row of rows) {
    let at = 0;
    columns.forEach((column, d) => {
      at = at * axes[d]!.length + places[d]!.get(cell(row, column))!;
    });
    const value = cell(row, valueColumn);
    if (!Number.isNaN(values[at]) && values[at] !== value) {
      throw new RangeError(
        `Cannot use ${what}: ${nodeName(columns, axes, at)} is given twice, as ${values[at]} and ${value}`,
      );
    }
    values[at] = value;
  }
  const missing = values.findIndex((v) => Number.isNaN(v));
  if (missing >= 0) {
    const count = values.reduce((sum, v) => sum + (Number.isNaN(v) ? 1 : 0), 0);
    throw new RangeError(
      `Cannot use ${what}: no row for ${
        nodeName(columns, axes, missing)
      } (${count} of ${values.length} missing), ` +
        `need every combination of ${columns.join(", ")}`,
    );
  }
  return { axes, values };
}

function nodeName(columns: readonly string[], axes: readonly Float64Array[], at: number): string {
  const parts: string[] = [];
  for (let d = axes.length - 1; d >= 0; d--) {
    const axis = axes[d]!;
    parts.unshift(`${columns[d]} = ${axis[at % axis.length]}`);
    at = Math.floor(at / axis.length);
  }
  return parts.join(", ");
}

/** Geometry parameters that at least one row states, in a fixed order. */
export function geometryColumns(rows: readonly object[]): GeometryParameter[] {
  return GEOMETRY_PARAMETERS.filter((p) =>
    rows.some((row) => (row as Record<string, unknown>)[p] !== undefined)
  );
}

/** Weights on the flattened geometry part of a grid. */
export interface Corners {
  readonly offsets: readonly number[];
  readonly weights: readonly number[];
}

/**
 * Interpolation weights over the geometry axes, or the derivative along one of them. A parameter that `geometry`
 * does not state is taken from `nominal`, and if the table has one value only, from the table.
 * @throws RangeError for a parameter not known, or beyond the table
 */
export function geometryCorners(
  parameters: readonly GeometryParameter[],
  axes: readonly Float64Array[],
  geometry: GuideGeometry,
  nominal: NominalGeometry,
  along: GeometryParameter | null,
): Corners {
  let offsets = [0];
  let weights = [1];
  parameters.forEach((parameter, d) => {
    const axis = axes[d]!;
    const stated = geometry[parameter] ?? nominal[parameter] ?? (axis.length === 1 ? axis[0] : undefined);
    if (stated === undefined) {
      throw new RangeError(
        `Cannot look up the table: ${parameter} is not known, need ${axis[0]} to ${axis[axis.length - 1]}`,
      );
    }
    const local = hermiteWeights(axis, insideAxis(axis, stated, parameter), parameter === along ? 1 : 0);
    const nextOffsets: number[] = [];
    const nextWeights: number[] = [];
    for (let c = 0; c < offsets.length; c++) {
      for (let k = 0; k < local.weights.length; k++) {
        const w = weights[c]! * local.weights[k]!;
        if (w === 0) continue;
        nextOffsets.push(offsets[c]! * axis.length + local.first + k);
        nextWeights.push(w);
      }
    }
    offsets = nextOffsets;
    weights = nextWeights;
  });
  return { offsets, weights };
}
