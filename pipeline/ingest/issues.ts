/** Why a cell, and with it its row, cannot be used. */
export interface Problem {
  readonly column: string;
  /** The cell as written. */
  readonly value: string;
  readonly reason: string;
  /** What would be right. */
  readonly wanted: string;
}

/** A row kept aside. */
export interface QuarantinedRow extends Problem {
  readonly line: number;
  /** The row as written, cells joined by ` | `, cut to {@link LONGEST_EXCERPT} characters. */
  readonly row: string;
}

export const LONGEST_EXCERPT = 200;

/** Something to know about rows that are used. */
export interface Remark {
  readonly code: string;
  readonly file: string;
  readonly line?: number;
  readonly statement: string;
}

/** At most so many remarks of one code and file are told one by one. */
const TOLD_ONE_BY_ONE = 10;

/** Gathers remarks; of a code that keeps coming back in a file only the first few are kept, and the number of the others. */
export class Remarks {
  readonly #told: Remark[] = [];
  readonly #counts = new Map<string, number>();

  add(code: string, file: string, statement: string, line?: number): void {
    const key = `${file}\n${code}`;
    const n = (this.#counts.get(key) ?? 0) + 1;
    this.#counts.set(key, n);
    if (n <= TOLD_ONE_BY_ONE) {
      this.#told.push({ code, file, statement, ...(line === undefined ? {} : { line }) });
    }
  }

  list(): Remark[] {
    const more = [...this.#counts].filter(([, n]) => n > TOLD_ONE_BY_ONE).map(([key, n]): Remark => {
      const [file, code] = key.split("\n") as [string, string];
      return { code, file, statement: `${n - TOLD_ONE_BY_ONE} more of the same (${code})` };
    });
    return [...this.#told, ...more];
  }
}

export const excerpt = (cells: readonly string[]): string => {
  const text = cells.slice(0, 50).map((cell) => cell.slice(0, LONGEST_EXCERPT)).join(" | ");
  // A cut may fall between the halves of a character.
  return (text.length <= LONGEST_EXCERPT ? text : `${text.slice(0, LONGEST_EXCERPT - 1)}…`).toWellFormed();
};

/** A remark as one line: `file:line: statement`. */
export const remarkText = (remark: Remark): string =>
  `${remark.file}${remark.line === undefined ? "" : `:${remark.line}`}: ${remark.statement}`;
