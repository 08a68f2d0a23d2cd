import stringWidth from "string-width";
import { type Cell, cellText, visibleText } from "./values.ts";

export interface TableColumn {
  readonly title: string;
  /** Left out: right if the column holds numbers and nothing else. */
  readonly align?: "left" | "right";
  /** Never cut, as numbers are: an id is of no use without its end. */
  readonly whole?: boolean;
  /** Significant digits of numbers that are not whole; 6 if left out. */
  readonly digits?: number;
}

export interface TableStyle {
  /** Columns of the terminal; 80 if left out. */
  readonly width?: number;
  /** Bold headings. */
  readonly colour?: boolean;
}

const GAP = "  ";
/** The least that a text column is cut to. */
const LEAST = 6;

/** Columns that a text takes; plain ASCII, nearly all of it, need not be looked at letter by letter. */
const isPlain = (text: string): boolean => /^[\x20-\x7e]*$/.test(text);
const widthOf = (text: string): number => isPlain(text) ? text.length : stringWidth(text);

interface Measure {
  /** Width at which nothing is cut. */
  readonly full: number;
  /** Width below which the column is of no use. */
  readonly least: number;
  readonly right: boolean;
}

/**
 * A plain text table that fits a width: headings, a rule, rows. Text that is too long ends in …; a number is never cut,
 * since what is left of it would be another number. Columns that do not fit even so are left out from the right, and a
 * last line names them. (Own code: cli-table3 took 10 s for 5,000 rows of 8 columns.)
 */
export function textTable(
  columns: readonly TableColumn[],
  rows: readonly (readonly Cell[])[],
  { width = 80, colour = false }: TableStyle = {},
): string {
  const cells = rows.map((row) => columns.map((column, i) => cellText(row[i], column.digits)));
  const titles = columns.map((column) => visibleText(column.title));
  const measures = columns.map((column, i) => measure(column, i, rows, cells));
  const widths = fit(measures, width);
  const line = (texts: readonly string[]) =>
    widths.map((w, i) => pad(cut(texts[i]!, w), w, measures[i]!.right)).join(GAP).trimEnd();
  const heading = line(titles);
  const missing = titles.slice(widths.length);
  return [
    colour ? `\x1b[1m${heading}\x1b[22m` : heading,
    widths.map((w) => "─".repeat(w)).join(GAP),
    ...cells.map(line),
    ...missing.length === 0 ? [] : wrap(`not shown for lack of width: ${missing.join(", ")}`, width),
  ].map((text) => text + "\n").join("");
}

function measure(
  column: TableColumn,
  i: number,
  rows: readonly (readonly Cell[])[],
  cells: readonly (readonly string[])[],
): Measure {
  const isNumber = (cell: Cell) => typeof cell === "number" || typeof cell === "bigint";
  const some = rows.some((row) => isNumber(row[i]));
  const numeric = some && rows.every((row) => isNumber(row[i]) || row[i] === null || row[i] === undefined);
  // Where numbers stand among texts, the longest number still must not be cut.
  const number = rows.reduce(
    (most, row, r) => isNumber(row[i]) ? Math.max(most, cells[r]![i]!.length) : most,
    0,
  );
  const widest = cells.reduce((most, row) => Math.max(most, widthOf(row[i]!)), 0);
  const full = Math.max(widest, widthOf(visibleText(column.title)), 1);
  const least = column.whole === true ? full : Math.min(full, Math.max(number, LEAST));
  return { full, least, right: column.align === undefined ? numeric : column.align === "right" };
}

/** Widths of as many columns as fit; the widest give way first. */
function fit(measures: readonly Measure[], width: number): number[] {
  const total = (widths: readonly number[]) =>
    widths.reduce((sum, w) => sum + w, 0) + GAP.length * Math.max(0, widths.length - 1);
  let shown = measures.length;
  while (shown > 1 && total(measures.slice(0, shown).map((m) => m.least)) > width) shown--;
  const widths = measures.slice(0, shown).map((m) => m.full);
  for (let over = total(widths) - width; over > 0; over--) {
    const widest = widths.reduce(
      (best, w, i) => w > measures[i]!.least && (best < 0 || w > widths[best]!) ? i : best,
      -1,
    );
    if (widest < 0) break; // one column of numbers that is wider than the terminal
    widths[widest]!--;
  }
  return widths;
}

function pad(text: string, width: number, right: boolean): string {
  const space = " ".repeat(Math.max(0, width - widthOf(text)));
  return right ? space + text : text + space;
}

/** Cuts by what the eye sees: a character may be two columns wide, or join the one before it. */
function cut(text: string, width: number): string {
  if (widthOf(text) <= width) return text;
  if (isPlain(text)) return text.slice(0, width - 1) + "…";
  let kept = "";
  for (const { segment } of segments.segment(text)) {
    if (widthOf(kept + segment) > width - 1) break;
    kept += segment;
  }
  return kept + "…";
}
const segments = new Intl.Segmenter("en", { granularity: "grapheme" });

/** Breaks a sentence at spaces, but not between a number and its % or u; a word longer than the width is cut. */
export function wrap(text: string, width: number): string[] {
  const lines: string[] = [];
  let current = "";
  for (const word of text.split(/(?<! ±) (?![%±] ?)/)) {
    const longer = current === "" ? word : `${current} ${word}`;
    if (widthOf(longer) <= width) {
      current = longer;
    } else {
      if (current !== "") lines.push(current);
      current = cut(word, width);
    }
  }
  return current === "" ? lines : [...lines, current];
}
