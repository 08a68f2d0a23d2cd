import type { Polarisation } from "../../shared/vocabulary.ts";
import type { TableShape } from "../ledger/mod.ts";

/** Traits that readings are reduced to; the unit is in the name. */
export type TraitName =
  | "loss_db_cm"
  | "coupling_db"
  | "mfd_x_um"
  | "mfd_y_um"
  | "reflectivity"
  | "duty"
  | "duty_sd"
  | "merged"
  | "width_error_um"
  | "film_thickness_nm"
  | "etch_depth_nm"
  | "titanium_nm"
  | "walls_complete"
  | "mismatch_offset_per_m"
  | "effective_length_mm"
  | "asymmetry"
  | "mismatch_sd_per_m"
  | "peak_kept";

/** Lines of one file that a trait rests on, as stretches [first, last]. */
export interface ReadingRef {
  readonly table: string;
  readonly file_name: string;
  readonly source_file: string;
  readonly lines: readonly (readonly [number, number])[];
}

/** One trait as the readings of one unit give it. */
export interface TraitRow {
  readonly trait: TraitName;
  readonly scope: "guide" | "die" | "wafer" | "coating_run";
  /** Full id of the guide, die or wafer; for a coating run its id and facet: `C118|in`. */
  readonly unit: string;
  readonly wafer: string | null;
  readonly die_id: string | null;
  readonly guide_id: string | null;
  readonly width_um: number | null;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  /** `TE>TE+TM`, for traits of a process. */
  readonly process: string | null;
  readonly value: number;
  readonly u: number;
  /**
   * u of the value as a sample of its neighbours, where that is more than u: a scan's offset holds what the guide's own
   * cross-section errs by, which is nothing of its neighbours'. Null or left out: u.
   */
  readonly u_pooled?: number | null;
  /** Of how many things a share was counted; left out or null for what is no share. */
  readonly counted?: number | null;
  /** Where u comes from: stated with the readings, the platform's default, or the fit. */
  readonly u_from: "stated" | "platform" | "fit";
  readonly method: string;
  readonly readings: readonly ReadingRef[];
  /** What else the method found, for people. */
  readonly detail: string | null;
}

export const TRAIT_SHAPE = {
  lot: "text",
  trait: "text",
  scope: "text",
  unit: "text",
  wafer: "text",
  die_id: "text",
  guide_id: "text",
  width_um: "f64",
  wavelength_nm: "f64",
  polarisation: "text",
  process: "text",
  value: "f64",
  u: "f64",
  u_pooled: "f64",
  counted: "f64",
  u_from: "text",
  method: "text",
  readings: "text",
  detail: "text",
} as const satisfies TableShape;

/** A finding about readings that is no trait: kept in the ledger and shown. */
export interface ReduceRemark {
  readonly code: string;
  readonly unit: string;
  readonly statement: string;
}

export const REDUCE_REMARK_SHAPE = {
  lot: "text",
  code: "text",
  unit: "text",
  statement: "text",
} as const satisfies TableShape;

/** References to rows, one per file, lines joined into stretches. */
export function refsOf(
  table: string,
  rows: readonly { readonly file_name: string; readonly source_file: string; readonly source_line: number }[],
): ReadingRef[] {
  const byFile = new Map<string, { file_name: string; source_file: string; lines: number[] }>();
  for (const { file_name, source_file, source_line } of rows) {
    const key = `${file_name}|${source_file}`;
    const held = byFile.get(key);
    if (held === undefined) byFile.set(key, { file_name, source_file, lines: [source_line] });
    else held.lines.push(source_line);
  }
  return [...byFile.values()].map(({ file_name, source_file, lines }) => ({
    table,
    file_name,
    source_file,
    lines: stretches(lines),
  }));
}

function stretches(lines: readonly number[]): [number, number][] {
  const out: [number, number][] = [];
  for (const line of [...new Set(lines)].sort((a, b) => a - b)) {
    const last = out.at(-1);
    if (last !== undefined && line === last[1] + 1) last[1] = line;
    else out.push([line, line]);
  }
  return out;
}
