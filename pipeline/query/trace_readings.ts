import type { RecordBatch, Vector } from "apache-arrow";
import { LedgerError } from "../../shared/errors.ts";
import type { Ledger } from "../ledger/mod.ts";
import type { Source } from "../records.ts";
import type { ReadingRef } from "../traits/trait_row.ts";
import type { TracedReading } from "./trace_types.ts";

/** Tables in which one trait rests on thousands of rows: shown as stretches of lines, by their first and last row. */
const IN_STRETCHES = ["walls", "tuning"];

/** Value and stated uncertainty of a reading, by table; by trait where a row holds several values. */
const VALUES: Readonly<Record<string, readonly [value: string, u: string | null]>> = {
  cutback: ["insertion_loss_db", "u_insertion_loss_db"],
  fringes: ["contrast", "u_contrast"],
  poling: ["duty_mean", null],
  "poling|duty_sd": ["duty_sd", null],
  "poling|merged": ["merged", null],
  walls: ["position_um", null],
  facets: ["reflectivity", "u_reflectivity"],
  "modes|mfd_x_um": ["mfd_x_um", "u_mfd_um"],
  "modes|mfd_y_um": ["mfd_y_um", "u_mfd_um"],
  geometry: ["value", "u_value"],
  tuning: ["power_rel", null],
};

/** Columns that say where a row is from and what it is about; shown on their own. */
const NOT_IN_ROW = [
  "lot",
  "file_name",
  "source_file",
  "source_line",
  "source_line_last",
  "scope",
  "unit",
  "wafer",
  "die",
  "guide",
  "die_id",
  "guide_id",
  "coating_run",
  "positions_um",
  "quarantined",
];

type Row = Record<string, unknown>;

/** Rows of a lot's reading tables that some references name, as they were in force. */
export class ReadingRows {
  readonly #rows = new Map<string, Row>();

  /** @param past the ledger as it stood when the references were made */
  static async load(past: Ledger, lot: string, refs: readonly ReadingRef[]): Promise<ReadingRows> {
    const loaded = new ReadingRows();
    for (const table of new Set(refs.map((ref) => ref.table))) {
      const wanted = new Map<string, Set<number>>();
      for (const ref of refs.filter((r) => r.table === table)) {
        const key = fileKey(ref);
        const lines = wanted.get(key) ?? new Set();
        for (const [first, last] of stretchesOf(ref)) lines.add(first).add(last);
        wanted.set(key, lines);
      }
      if (table === "walls") await loaded.#loadWalls(past, lot, wanted);
      else await loaded.#loadRows(past, table, lot, wanted);
    }
    return loaded;
  }

  /** The readings that a reference names; `trait` tells which value of a row is meant. */
  resolve(ref: ReadingRef, trait: string): TracedReading[] {
    const [quantity, u] = VALUES[`${ref.table}|${trait}`] ?? VALUES[ref.table] ?? missingTable(ref.table);
    return stretchesOf(ref).map(([first, last]) => {
      const row = this.#row(ref, first);
      const { file_name, source_file } = ref;
      const reading = {
        table: ref.table,
        quantity: ref.table === "geometry" ? String(row.quantity) : quantity,
        unit: String(row.unit),
        file_name,
        source_file,
        source_line: first,
        value: row[quantity] as number,
        u: u === null ? null : row[u] as number | null,
        rows: last - first + 1,
        row: restOf(row, [quantity, u, ...first === last ? [] : ["temperature_c", "wavelength_nm"]]),
      };
      if (first === last) return reading;
      const end = this.#row(ref, last);
      return { ...reading, source_line_last: last, value_last: end[quantity] as number };
    });
  }

  #row(ref: ReadingRef, line: number): Row {
    const row = this.#rows.get(rowKey(ref.table, fileKey(ref), line));
    if (row !== undefined) return row;
    throw new LedgerError(
      `Cannot trace: a trait rests on ${ref.file_name}:${line} (sha256 ${ref.source_file}), ` +
        `which table ${ref.table} does not hold`,
      { file: ref.file_name, line },
    );
  }

  async #loadRows(past: Ledger, table: string, lot: string, wanted: ReadonlyMap<string, Set<number>>) {
    for await (const batch of past.streamActive(table, lot)) {
      const sources = sourcesOf(batch);
      for (let k = 0; k < batch.numRows; k++) {
        const source = sources(k);
        if (wanted.get(fileKey(source))?.has(source.source_line) !== true) continue;
        const row = Object.fromEntries(
          batch.schema.fields.map((f) => [f.name, batch.getChild(f.name)!.get(k)]),
        );
        this.#rows.set(rowKey(table, fileKey(source), source.source_line), row);
      }
    }
  }

  /** Walls are packed: a row holds those of consecutive lines. */
  async #loadWalls(past: Ledger, lot: string, wanted: ReadonlyMap<string, Set<number>>) {
    for await (const batch of past.streamActive("walls", lot)) {
      const sources = sourcesOf(batch);
      const last = batch.getChild("source_line_last")!;
      for (let k = 0; k < batch.numRows; k++) {
        const source = sources(k);
        for (const line of wanted.get(fileKey(source)) ?? []) {
          if (line < source.source_line || line > last.get(k)) continue;
          const positions = (batch.getChild("positions_um")!.get(k) as Vector).toArray() as Float64Array;
          const at = line - source.source_line;
          if (at >= positions.length) continue; // a row without positions only counts quarantined ones
          const fields = batch.schema.fields.filter((f) => f.name !== "positions_um");
          const row = Object.fromEntries(fields.map((f) => [f.name, batch.getChild(f.name)!.get(k)]));
          this.#rows.set(rowKey("walls", fileKey(source), line), { ...row, position_um: positions[at] });
        }
      }
    }
  }
}

const fileKey = ({ file_name, source_file }: Omit<Source, "source_line">): string =>
  `${source_file}|${file_name}`;
const rowKey = (table: string, file: string, line: number): string => `${table}|${line}|${file}`;

/** Lines of a reference one by one, or as they are where there are thousands. */
function stretchesOf({ table, lines }: ReadingRef): (readonly [number, number])[] {
  if (IN_STRETCHES.includes(table)) return [...lines];
  return lines.flatMap(([first, last]) =>
    Array.from({ length: last - first + 1 }, (_, k) => [first + k, first + k] as const)
  );
}

function sourcesOf(batch: RecordBatch): (k: number) => Source {
  const [file, sha, line] = ["file_name", "source_file", "source_line"].map((c) => batch.getChild(c)!);
  return (k) => ({ file_name: file!.get(k), source_file: sha!.get(k), source_line: line!.get(k) });
}

function restOf(row: Row, shown: readonly (string | null)[]): Row {
  return Object.fromEntries(
    Object.entries(row).filter(([name, cell]) =>
      cell !== null && !shown.includes(name) && !NOT_IN_ROW.includes(name)
    ),
  );
}

function missingTable(table: string): never {
  throw new LedgerError(
    `Cannot trace: a trait rests on table ${table}, of which no reading's value is known`,
  );
}
