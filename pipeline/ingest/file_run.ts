import type { TableKind } from "../../shared/schemas/lot.ts";
import type { Covered } from "./coverage.ts";
import { excerpt, type Problem } from "./issues.ts";
import type { Owner } from "./known_ids.ts";
import type { RunTables } from "./run_tables.ts";

/** A file of the run folder as the ledger will know it. */
export interface TakenFile {
  readonly lot: string;
  /** Path within the run folder, with `/`. */
  readonly name: string;
  readonly kind: TableKind;
  readonly sha256: string;
}

/** What became of a file's rows: accepted + quarantined = rows. */
export interface FileCounts extends TakenFile {
  readonly rows: number;
  readonly accepted: number;
  readonly quarantined: number;
}

/** Counts, and which units the accepted rows are about. */
export interface FileOutcome extends FileCounts {
  readonly covered: readonly Covered[];
}

/** Counts the rows of one file, and writes those kept aside and what the others cover. */
export class FileRun {
  accepted = 0;
  quarantined = 0;
  readonly #covered = new Map<string, { scope: string; rows: number }>();

  constructor(readonly file: TakenFile, readonly tables: RunTables | null) {}

  /** First cells of every row of every table. */
  origin(line: number): [string, string, string, number] {
    return [this.file.lot, this.file.name, this.file.sha256, line];
  }

  accept(scope: Owner["scope"] | "coating_run", unit: string): void {
    this.accepted++;
    const covered = this.#covered.get(unit);
    if (covered === undefined) this.#covered.set(unit, { scope, rows: 1 });
    else covered.rows++;
  }

  quarantine(line: number, cells: readonly string[], problem: Problem): void {
    this.quarantined++;
    const { column, reason, wanted } = problem;
    const value = excerpt([problem.value]);
    this.tables?.append("quarantine", [
      ...this.origin(line),
      this.file.kind,
      column,
      value,
      reason,
      wanted,
      excerpt(cells),
    ]);
  }

  finish(): FileOutcome {
    const { kind } = this.file;
    const covered: Covered[] = [];
    for (const [unit, { scope, rows }] of this.#covered) {
      this.tables?.append("coverage", [...this.origin(1), kind, scope, unit, rows]);
      covered.push({ kind, scope, unit });
    }
    const { accepted, quarantined } = this;
    return { ...this.file, rows: accepted + quarantined, accepted, quarantined, covered };
  }
}

/** What is wrong with a row whose line was cut. */
export const tooLong: Problem = {
  column: "",
  value: "",
  reason: "the row holds a line longer than a megabyte",
  wanted: "a line of a few hundred characters; is a line end missing?",
};
