import { finished } from "node:stream/promises";
import { parse } from "csv-parse";
import { InputError } from "../../shared/errors.ts";
import { LONGEST_LINE_BYTES, streamText } from "./text_file.ts";

/** A row of a CSV file as written. */
export interface CsvRow {
  readonly cells: readonly string[];
  /** Physical line (from 1) that the row begins on. */
  readonly line: number;
  /** The row's line was too long to be read; `cells` holds how it begins. */
  readonly tooLong?: true;
}

/**
 * Streams the rows of a CSV file, blank lines left out; blanks around cells are dropped. Quoted cells may hold line ends.
 * Rows come in small lists: one per chunk of the file.
 * @param skipLines physical lines before the headings
 * @throws InputError for text that is no UTF-8, and for a quote that is never closed
 */
export async function* streamCsv(
  path: string,
  name: string,
  style: { readonly delimiter: string; readonly skipLines: number },
): AsyncGenerator<readonly CsvRow[]> {
  let rows: CsvRow[] = [];
  let lastEnd = style.skipLines;
  const cut = new Map<number, string>(); // over-long lines that the parser has not passed yet
  const parser = parse({
    delimiter: style.delimiter,
    record_delimiter: ["\n"], // line ends are made alike before
    relax_column_count: true, // the number of cells is checked, and told, per row
    relax_quotes: true, // a stray quote is a character of its cell
    skip_empty_lines: true,
    max_record_size: 2 * LONGEST_LINE_BYTES,
    on_record: (record: string[], { lines }) => {
      const end = lines + style.skipLines;
      // A row that ends right below the one before has one line; else blank lines or quoted line ends lie between.
      const line = end - lastEnd > 1 ? end - quotedLineEnds(record) : end;
      lastEnd = end;
      const cells = record.map((cell) => cell.trim());
      let tooLong = false;
      for (const [at, start] of cut) {
        if (at > end) break;
        if (at < line) rows.push({ cells: [start], line: at, tooLong: true });
        else tooLong = true; // a line was cut out of this row
        cut.delete(at);
      }
      if (tooLong) rows.push({ cells, line, tooLong });
      else if (cells.some((cell) => cell !== "")) rows.push({ cells, line });
      return null; // nothing queues up in the parser
    },
  });
  parser.on("error", () => {}); // the calls below reject with it
  const taken = (): CsvRow[] => {
    const out = rows;
    rows = [];
    return out;
  };
  let skip = style.skipLines;
  for await (const part of streamText(path, name)) {
    let { text, line } = part;
    for (; skip > 0 && text !== ""; skip--, line++) {
      const end = text.indexOf("\n");
      text = end < 0 ? "" : text.slice(end + 1);
    }
    if (text === "") continue;
    if (part.tooLong !== undefined) cut.set(line, part.tooLong);
    try {
      await new Promise<void>((done, fail) => parser.write(text, (error) => error ? fail(error) : done()));
    } catch (cause) {
      throw unreadable(name, lastEnd + 1, cause);
    }
    const out = taken();
    if (out.length > 0) yield out;
  }
  parser.end();
  parser.resume();
  await finished(parser).catch((cause) => {
    throw unreadable(name, lastEnd + 1, cause);
  });
  for (const [line, start] of cut) rows.push({ cells: [start], line, tooLong: true });
  if (rows.length > 0) yield taken();
}

function unreadable(name: string, line: number, cause: unknown): InputError {
  const code = (cause as { code?: string }).code;
  const why = code === "CSV_MAX_RECORD_SIZE" || code === "CSV_QUOTE_NOT_CLOSED"
    ? `a quote (") on this line or below it is opened and never closed; close it, or write "" for a quote inside a cell`
    : (cause as Error).message;
  return new InputError(`Cannot read ${name}:${line}: ${why}`, { file: name, line }, { cause });
}

const quotedLineEnds = (cells: readonly string[]): number =>
  cells.reduce((n, cell) => cell.includes("\n") ? n + cell.split("\n").length - 1 : n, 0);
