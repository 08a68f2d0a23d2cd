import type { RecordBatch } from "apache-arrow";
import type { Ledger } from "../ledger/mod.ts";
import type { ReadingRef, TraitRow } from "./trait_row.ts";

/** The walls of one guide in one file. */
export interface GuideWalls {
  readonly guide_id: string;
  readonly positions_um: Float64Array;
  /** Wall rows of this guide that were kept aside. */
  readonly quarantined: number;
  readonly refs: readonly ReadingRef[];
}

const COLUMNS = [
  "guide_id",
  "file_name",
  "source_file",
  "source_line",
  "source_line_last",
  "positions_um",
  "quarantined",
] as const;

interface Part {
  readonly positions: Float64Array;
  readonly first: number;
  readonly last: number;
  readonly quarantined: number;
  readonly file_name: string;
  readonly source_file: string;
}

/**
 * Walls of a lot, one list per guide and file, each given as soon as its last row is read. A first pass over the ids counts
 * the rows of each list, so memory holds only lists that are still open: one where files list guide after guide.
 */
export async function* streamWalls(ledger: Ledger, lot: string): AsyncGenerator<GuideWalls> {
  const expected = new Map<string, number>();
  for await (const batch of ledger.streamActive("walls", lot, { columns: ["guide_id", "file_name"] })) {
    const [guide, file] = [batch.getChild("guide_id")!, batch.getChild("file_name")!];
    for (let row = 0; row < batch.numRows; row++) {
      const key = `${file.get(row)}|${guide.get(row)}`;
      expected.set(key, (expected.get(key) ?? 0) + 1);
    }
  }
  const open = new Map<string, Part[]>();
  for await (const batch of ledger.streamActive("walls", lot, { columns: [...COLUMNS] })) {
    for (const [guide, part] of partsOf(batch)) {
      const key = `${part.file_name}|${guide}`;
      const parts = open.get(key) ?? [];
      parts.push(part);
      if (parts.length < expected.get(key)!) {
        open.set(key, parts);
        continue;
      }
      open.delete(key);
      yield joined(guide, parts);
    }
  }
}

function* partsOf(batch: RecordBatch): Generator<[string, Part]> {
  const column = (name: typeof COLUMNS[number]) => batch.getChild(name)!;
  const [guide, file, sha, first, last, positions, quarantined] = COLUMNS.map(column);
  for (let row = 0; row < batch.numRows; row++) {
    const list = positions!.get(row) as { toArray(): Float64Array } | null;
    yield [guide!.get(row) as string, {
      positions: list === null ? new Float64Array(0) : Float64Array.from(list.toArray()),
      first: first!.get(row) as number,
      last: last!.get(row) as number,
      quarantined: quarantined!.get(row) as number,
      file_name: file!.get(row) as string,
      source_file: sha!.get(row) as string,
    }];
  }
}

function joined(guide_id: string, parts: readonly Part[]): GuideWalls {
  const positions_um = new Float64Array(parts.reduce((sum, p) => sum + p.positions.length, 0));
  let at = 0;
  for (const { positions } of parts) {
    positions_um.set(positions, at);
    at += positions.length;
  }
  const { file_name, source_file } = parts[0]!;
  const lines = parts.filter((p) => p.positions.length > 0).map((p) => [p.first, p.last] as const);
  return {
    guide_id,
    positions_um,
    quarantined: Math.max(...parts.map((p) => p.quarantined)),
    refs: [{ table: "walls", file_name, source_file, lines }],
  };
}

/** Guides with a complete wall list, and the file that it stands in: the last one, where a guide was inspected again. */
export function completeWalls(traits: readonly TraitRow[]): Map<string, string> {
  const out = new Map<string, string>();
  for (const row of traits) {
    if (row.trait === "walls_complete" && row.value === 1) out.set(row.unit, row.readings[0]!.file_name);
  }
  return out;
}
