import type { Polarisation } from "../../shared/vocabulary.ts";
import type { Engine } from "./engine.ts";

/** A reading that could be taken next, best first. */
export interface ReadingAdvice {
  readonly kind: string;
  readonly reads: readonly {
    readonly trait: string;
    readonly wavelength_nm: number | null;
    readonly polarisation: Polarisation | null;
    readonly u: number;
    readonly from: string;
  }[];
  readonly doubt: number;
  /** Expected fall of the doubt. */
  readonly reduction: number;
  /** Probabilities of the decision that would follow. */
  readonly p_accept: number;
  readonly p_hold: number;
  readonly p_reject: number;
}

/** Of each guide with an analysis the best reading, if any takes away some of the doubt. Reads `next_readings`. */
export function bestReadings(engine: Engine, request: string): Map<string, ReadingAdvice> {
  const { columns, rows } = engine.query(
    `SELECT guide_id, kind, trait, wavelength_nm, polarisation, u_reading, u_from, doubt, reduction, p_accept, p_hold,
       p_reject
     FROM next_readings
     WHERE place = 1 AND reduction > 0 AND request = '${request.replaceAll("'", "''")}'`,
  );
  const out = new Map<string, ReadingAdvice>();
  for (const cells of rows) {
    const row = Object.fromEntries(columns.map((c, k) => [c.name, cells[k]])) as unknown as Row;
    const {
      guide_id,
      kind,
      trait,
      wavelength_nm,
      polarisation,
      doubt,
      reduction,
      p_accept,
      p_hold,
      p_reject,
    } = row;
    const reads = [
      ...out.get(guide_id)?.reads ?? [],
      { trait, wavelength_nm, polarisation, u: row.u_reading, from: row.u_from },
    ];
    out.set(guide_id, { kind, reads, doubt, reduction, p_accept, p_hold, p_reject });
  }
  return out;
}

interface Row extends Omit<ReadingAdvice, "reads"> {
  readonly guide_id: string;
  readonly trait: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly u_reading: number;
  readonly u_from: string;
}
