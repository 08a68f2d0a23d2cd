// Pure: no I/O, no clock, no hidden randomness.
import type { GuideGeometry, Polarisation } from "../../shared/vocabulary.ts";

/** Effective area of the three-wave overlap. */
export interface AreaModel {
  /**
   * A_eff in m² of a process written pump>signal+idler (`TE>TE+TM`; the order of signal and idler is free).
   * @throws RangeError for a process without an area, or a geometry beyond the table
   */
  effectiveArea(process: string, geometry: GuideGeometry): number;
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
