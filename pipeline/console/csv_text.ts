import { type Cell, jsonText } from "./values.ts";

/**
 * CSV with a line of headings, quoted as in RFC 4180 (but lines end in LF alone, as other text tools expect). Numbers are
 * written in full, missing values and NaN are empty, infinities stay what they are.
 *
 * A text that begins with =, +, -, @, a tab or a carriage return would run as a formula when a spreadsheet opens the file;
 * such texts come from instruments' files, which nobody vouches for. They get an apostrophe in front, which spreadsheets
 * take as "this is text". Numbers are left alone.
 */
export function csvText(titles: readonly string[], rows: Iterable<readonly Cell[]>): string {
  const lines = [titles.map((title) => quoted(harmless(title))).join(",")];
  for (const row of rows) lines.push(titles.map((_, i) => field(row[i])).join(","));
  return lines.join("\n") + "\n";
}

function field(cell: Cell): string {
  if (cell === null || cell === undefined || Number.isNaN(cell)) return "";
  if (typeof cell === "object") return quoted(jsonText(cell, { indent: 0 }));
  return typeof cell === "string" ? quoted(harmless(cell)) : String(cell);
}

const harmless = (text: string) => /^[=+\-@\t\r]/.test(text) ? `'${text}` : text;
const quoted = (text: string) => /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
