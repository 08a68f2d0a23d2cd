// Rows in force of a lot, as plain objects: what the stages after ingest start from.
import type { Table } from "apache-arrow";
import { InputError } from "../shared/errors.ts";
import { compareIds } from "../shared/ids.ts";
import type { Polarisation } from "../shared/vocabulary.ts";
import type { Ledger } from "./ledger/mod.ts";

/** Where a row was read. */
export interface Source {
  readonly file_name: string;
  readonly source_file: string;
  readonly source_line: number;
}

/** What a reading belongs to: `unit` is the full id of what `scope` says. */
export interface Placed extends Source {
  readonly scope: "guide" | "die" | "wafer";
  readonly unit: string;
  readonly wafer: string;
  readonly die_id: string | null;
  readonly guide_id: string | null;
}

export interface GuideRecord extends Source {
  readonly wafer: string;
  readonly die_id: string;
  readonly guide_id: string;
  readonly x_mm: number;
  readonly y_mm: number;
  readonly group: string | null;
  readonly width_um: number;
  readonly period_um: number;
  readonly length_mm: number;
  readonly poled_from_mm: number;
  readonly poled_length_mm: number;
}

export interface CutbackRecord extends Placed {
  readonly wavelength_nm: number;
  readonly polarisation: Polarisation;
  readonly length_mm: number;
  readonly insertion_loss_db: number;
  readonly u_insertion_loss_db: number | null;
}
export interface FringesRecord extends Placed {
  readonly wavelength_nm: number;
  readonly polarisation: Polarisation;
  readonly contrast: number;
  readonly u_contrast: number | null;
  readonly facet_state: "bare" | "coated";
}
export interface PolingRecord extends Placed {
  readonly window_start_mm: number;
  readonly window_length_mm: number;
  readonly domains: number;
  readonly duty_mean: number;
  readonly duty_sd: number;
  readonly merged: number;
}
export interface FacetsRecord extends Source {
  readonly coating_run: string;
  readonly facet: "in" | "out";
  readonly wavelength_nm: number;
  readonly reflectivity: number;
  readonly u_reflectivity: number | null;
}
export interface ModesRecord extends Placed {
  readonly wavelength_nm: number;
  readonly polarisation: Polarisation;
  readonly mfd_x_um: number;
  readonly mfd_y_um: number;
  readonly u_mfd_um: number | null;
}
export interface GeometryRecord extends Placed {
  readonly z_mm: number | null;
  readonly quantity: "width_um" | "film_thickness_nm" | "etch_depth_nm" | "titanium_nm";
  readonly value: number;
  readonly u_value: number | null;
}
export interface TuningRecord extends Placed {
  readonly scan: string;
  readonly process: string;
  readonly polarisations: string;
  readonly temperature_c: number;
  readonly wavelength_nm: number;
  readonly power_rel: number;
}
export interface CoatingRecord extends Source {
  readonly die_id: string;
  readonly facet: "in" | "out";
  readonly coating_run: string;
  readonly entry: number;
}
export interface UnavailableRecord extends Source {
  readonly die_id: string;
  readonly reason: string;
}
export interface LotRecord extends Source {
  readonly lot: string;
  readonly platform: string;
  readonly started: string | null;
}

/** Row types of the tables of an ingest run that later stages read. */
export interface RecordTables {
  readonly lots: LotRecord;
  readonly guides: GuideRecord;
  readonly coatings: CoatingRecord;
  readonly unavailable: UnavailableRecord;
  readonly cutback: CutbackRecord;
  readonly fringes: FringesRecord;
  readonly poling: PolingRecord;
  readonly facets: FacetsRecord;
  readonly modes: ModesRecord;
  readonly geometry: GeometryRecord;
  readonly tuning: TuningRecord;
}

/** Rows of an Arrow table as objects; lists become typed arrays, nulls stay null. */
export function rowsOf(table: Table): Record<string, unknown>[] {
  const names = table.schema.fields.map((f) => f.name);
  const columns = names.map((name) => table.getChild(name)!);
  return Array.from({ length: table.numRows }, (_, row) => {
    const object: Record<string, unknown> = {};
    for (let c = 0; c < names.length; c++) object[names[c]!] = columns[c]!.get(row);
    return object;
  });
}

/** Rows in force of one table of a lot, in order of file and line. */
export async function recordsOf<K extends keyof RecordTables>(
  ledger: Ledger,
  table: K,
  lot: string,
): Promise<RecordTables[K][]> {
  const parts = await ledger.readActive(table, lot);
  return parts.flatMap((part) => rowsOf(part.table)) as unknown as RecordTables[K][];
}

/** Lots of the ledger, in order. */
export async function lotsOf(ledger: Ledger): Promise<string[]> {
  return [...new Set((await ledger.activeFiles()).map((f) => f.lot))].sort(compareIds);
}

/** One guide's design and everything of the lot that later stages look up by id. */
export interface LotDesign {
  readonly lot: LotRecord;
  readonly guides: readonly GuideRecord[];
  readonly guideById: ReadonlyMap<string, GuideRecord>;
  readonly guidesOfDie: ReadonlyMap<string, readonly GuideRecord[]>;
  /** Coating run that counts (the last entry) per `die|facet`. */
  readonly coatingOf: ReadonlyMap<string, CoatingRecord>;
  readonly unavailable: ReadonlyMap<string, UnavailableRecord>;
}

/** Reads a lot's design. @throws InputError for a lot that the ledger does not hold */
export async function loadDesign(ledger: Ledger, lot: string): Promise<LotDesign> {
  const [record] = await recordsOf(ledger, "lots", lot);
  if (record === undefined) {
    const known = await lotsOf(ledger);
    throw new InputError(
      `Unknown lot ${JSON.stringify(lot)}: the ledger ${ledger.directory} holds ${
        known.length === 0 ? "none" : known.join(", ")
      }`,
      { value: lot },
    );
  }
  const guides = (await recordsOf(ledger, "guides", lot)).sort((a, b) => compareIds(a.guide_id, b.guide_id));
  const guidesOfDie = new Map<string, GuideRecord[]>();
  for (const guide of guides) {
    const list = guidesOfDie.get(guide.die_id);
    if (list === undefined) guidesOfDie.set(guide.die_id, [guide]);
    else list.push(guide);
  }
  const coatings = (await recordsOf(ledger, "coatings", lot)).sort((a, b) => a.entry - b.entry);
  const unavailable = await recordsOf(ledger, "unavailable", lot);
  return {
    lot: record,
    guides,
    guideById: new Map(guides.map((g) => [g.guide_id, g])),
    guidesOfDie,
    coatingOf: new Map(coatings.map((c) => [`${c.die_id}|${c.facet}`, c])),
    unavailable: new Map(unavailable.map((u) => [u.die_id, u])),
  };
}
