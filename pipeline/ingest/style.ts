import { InputError, quoteValue } from "../../shared/errors.ts";
import { didYouMean, nearestWord } from "../../shared/schemas/nearest.ts";
import {
  isNumberColumn,
  type Lot,
  type ReadingStyle,
  rowSchema,
  type TableKind,
} from "../../shared/schemas/lot.ts";
import { parseNumber } from "./number_cell.ts";

/** Where a heading's values go. */
export interface Target {
  readonly to: string;
  readonly times: number;
  readonly plus: number;
}

/** How one file is to be read: the kind's style, overridden by the file's own. */
export interface FileStyle {
  readonly delimiter: string;
  readonly decimal: "." | ",";
  readonly decimalDeclared: boolean;
  readonly skipLines: number;
  readonly unitsRow: boolean;
  /** Values that are the same in all rows: from `constants` and from the file's name. */
  readonly constants: ReadonlyMap<string, string | number>;
  readonly columns: ReadonlyMap<string, Target>;
}

/**
 * Style and column names of a file out of lot.json. What is given for the file's name wins over what is given for its stem,
 * and that over what is given for the kind, entry by entry.
 * @throws InputError when the file's name does not match, or a constant is no value of its column
 */
export function fileStyle(lot: Lot, kind: TableKind, name: string): FileStyle {
  const file = name.slice(name.lastIndexOf("/") + 1);
  const stem = file.replace(/\.[^.]*$/, "");
  const keys = [...new Set([kind, stem, file])];
  const style: ReadingStyle = Object.assign({}, ...keys.map((key) => own(lot.reading_style, key) ?? {}));
  const columns = new Map<string, Target>();
  for (const key of keys) {
    for (const [heading, target] of Object.entries(own(lot.columns, key) ?? {})) {
      const { to, times = 1, plus = 0 } = typeof target === "string" ? { to: target } : target;
      columns.set(heading.trim(), { to, times, plus });
    }
  }
  const constants = new Map<string, string | number>();
  const give = (column: string, value: string | number, from: string) => {
    if (constants.has(column)) {
      throw new InputError(
        `Cannot read ${name}: "constants" and "name_pattern" of lot.json both give column "${column}"; need one of them`,
        { file: name, column },
      );
    }
    constants.set(column, checkedConstant(kind, name, column, value, from));
  };
  for (const [column, value] of Object.entries(style.constants ?? {})) {
    give(column, value, `"constants" of lot.json`);
  }
  if (style.name_pattern !== undefined) {
    for (const [column, value] of nameParts(style.name_pattern, stem, name)) {
      give(column, value, "the file's name");
    }
  }
  return {
    delimiter: style.delimiter ?? ",",
    decimal: style.decimal ?? ".",
    decimalDeclared: style.decimal !== undefined,
    skipLines: style.skip_lines ?? 0,
    unitsRow: style.units_row ?? false,
    constants,
    columns,
  };
}

/** A style's own entry: a file may be called `constructor`. */
const own = <T>(record: Readonly<Record<string, T>>, key: string): T | undefined =>
  Object.hasOwn(record, key) ? record[key] : undefined;

function checkedConstant(
  kind: TableKind,
  name: string,
  column: string,
  value: string | number,
  from: string,
): string | number {
  const shape = rowSchema(kind).shape;
  const refuse = (why: string): never => {
    throw new InputError(
      `Cannot read ${name}: ${from} gives column "${column}" ${quoteValue(value)}, ${why}`,
      {
        file: name,
        column,
        value: String(value),
      },
    );
  };
  if (!Object.hasOwn(shape, column)) {
    const known = Object.keys(shape);
    return refuse(
      `but ${kind} has no such column${didYouMean(nearestWord(column, known))}; columns: ${known.join(", ")}`,
    );
  }
  if (!isNumberColumn(kind, column)) {
    if (typeof value === "number") return refuse(`a number; need text in quotes, as ids are text`);
    return constantFits(kind, column, value) ? value : refuse(`need ${wanted(kind, column)}`);
  }
  const number = typeof value === "number" ? value : parseNumber(value, ".");
  if (typeof number !== "number" || !constantFits(kind, column, number)) {
    return value === "" && constantFits(kind, column, "") ? "" : refuse(`need ${wanted(kind, column)}`);
  }
  return number;
}

/** An empty text stands for an empty cell. */
const constantFits = (kind: TableKind, column: string, value: string | number): boolean =>
  (rowSchema(kind).shape[column] as unknown as { safeParse(v: unknown): { success: boolean } })
    .safeParse(value === "" ? null : value).success;

/** What would be right in a column, in words. */
export const wanted = (kind: TableKind, column: string): string => {
  const field = rowSchema(kind).shape[column] as unknown as FieldWords | undefined;
  return describe(field) ?? "another value";
};

interface FieldWords {
  readonly description?: string;
  unwrap?(): FieldWords;
}
const describe = (field: FieldWords | undefined): string | undefined =>
  field === undefined ? undefined : field.description ?? describe(field.unwrap?.());

function nameParts(pattern: string, stem: string, name: string): [string, string][] {
  const refuse = (why: string, cause?: unknown): never => {
    throw new InputError(
      `Cannot read ${name}: "name_pattern" ${quoteValue(pattern, 120)} of lot.json ${why}`,
      { file: name, value: pattern },
      { cause },
    );
  };
  // A repeated group that itself repeats, or offers a choice, can take for ever on a name that just fails to match.
  const bare = pattern.replace(/\\./g, "");
  if (/[+*}]\)?[+*{]/.test(bare) || /\([^()]*[+*}|][^()]*\)[+*{]/.test(bare)) {
    return refuse("repeats a part that itself repeats or has alternatives; need a simpler expression");
  }
  const expression = regularExpression(
    pattern,
    (cause) => refuse(`is no regular expression (${cause.message})`, cause),
  );
  const match = expression.exec(stem.slice(0, 255));
  if (match === null) return refuse(`does not match the file's stem ${quoteValue(stem)}`);
  const groups = Object.entries(match.groups ?? {});
  if (groups.length === 0) return refuse(`has no named group; need one per column, such as (?<die>\\d+)`);
  return groups.map(([column, text]) => [column, text ?? ""]);
}

/** With Unicode classes where the pattern allows it: the stricter reading refuses harmless escapes such as `\-`. */
function regularExpression(pattern: string, refuse: (cause: Error) => never): RegExp {
  try {
    return new RegExp(pattern, "u");
  } catch {
    try {
      return new RegExp(pattern);
    } catch (cause) {
      return refuse(cause as Error);
    }
  }
}
