// Pure: no I/O, no clock, no hidden randomness.
import type { GuideGeometry, Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { NominalGeometry } from "./index_model.ts";
import { geometryColumns, geometryCorners, gridOf } from "./_grid.ts";

/** Effective area of the three-wave overlap. */
export interface AreaModel {
  /**
   * A_eff in m² of a process written pump>signal+idler (`TE>TE+TM`; the order of signal and idler is free).
   * `waves`: where it is needed, for models that know areas at several wavelengths.
   * @throws RangeError for a process without an area, or a geometry beyond the table
   */
  effectiveArea(process: string, geometry: GuideGeometry, waves?: ThreeWaves): number;
}

/** Name of a process with signal and idler in alphabetic order: both orders share one value. */
export function processName(pump: Polarisation, signal: Polarisation, idler: Polarisation): string {
  return signal <= idler ? `${pump}>${signal}+${idler}` : `${pump}>${idler}+${signal}`;
}

/** `TM>TM+TE` → `TM>TE+TM`. @throws RangeError if the text is not pump>signal+idler of TE and TM */
export function canonicalProcess(process: string): string {
  const match = /^(TE|TM)>(TE|TM)\+(TE|TM)$/.exec(process);
  if (match === null) {
    throw new RangeError(
      `Cannot read the process ${JSON.stringify(process)}: need pump>signal+idler, each TE or TM`,
    );
  }
  return processName(match[1] as Polarisation, match[2] as Polarisation, match[3] as Polarisation);
}

/** The same effective area (µm²) for every process and geometry. @throws RangeError unless it is positive and finite */
export function constantAreaModel(effective_area_um2: number): AreaModel {
  if (!(effective_area_um2 > 0 && effective_area_um2 < Infinity)) {
    throw new RangeError(
      `Cannot use the effective area ${effective_area_um2} µm²: need a positive, finite number`,
    );
  }
  return {
    effectiveArea(process) {
      canonicalProcess(process);
      return effective_area_um2 * 1e-12;
    },
  };
}

/** One node of an area table, in the units of the file. */
export interface AreaTableRow {
  readonly process: string;
  readonly width_um: number;
  readonly film_thickness_nm?: number | undefined;
  readonly etch_depth_nm?: number | undefined;
  readonly titanium_nm?: number | undefined;
  readonly effective_area_um2: number;
}

/**
 * Effective areas from a table: for each process a full grid over width and the other geometry columns it has,
 * interpolated in the logarithm (areas stay positive) as the index is in geometry, never beyond the table.
 * `nominal`: geometry of a guide that does not state it.
 * @throws RangeError for a grid with holes (names the node) or an area that is not positive
 */
export function tableAreaModel(
  rows: readonly AreaTableRow[],
  nominal: NominalGeometry = {},
): AreaModel {
  const byProcess = new Map<string, AreaTableRow[]>();
  for (const row of rows) {
    const process = canonicalProcess(row.process);
    byProcess.set(process, [...byProcess.get(process) ?? [], row]);
  }
  if (byProcess.size === 0) throw new RangeError("Cannot use the area table: it has no rows");
  const tables = new Map(Array.from(byProcess, ([process, own]) => {
    const parameters = geometryColumns(own);
    const grid = gridOf(own, parameters, "effective_area_um2", `the area table (${process})`);
    const logarithms = grid.values.map((area) => {
      if (area > 0) return Math.log(area);
      throw new RangeError(`Cannot use the area table (${process}): found ${area} µm², need more than 0`);
    });
    return [process, { parameters, axes: grid.axes, logarithms }] as const;
  }));
  return {
    effectiveArea(process, geometry) {
      const table = tables.get(canonicalProcess(process));
      if (table === undefined) {
        throw new RangeError(
          `Cannot look up the effective area of ${process}: the table has ${[...tables.keys()].join(", ")}`,
        );
      }
      const { offsets, weights } = geometryCorners(table.parameters, table.axes, geometry, nominal, null);
      let logarithm = 0;
      for (let c = 0; c < offsets.length; c++) logarithm += weights[c]! * table.logarithms[offsets[c]!]!;
      return Math.exp(logarithm) * 1e-12;
    },
  };
}
