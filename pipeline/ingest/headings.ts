import { z } from "zod";
import { InputError, quoteValue } from "../../shared/errors.ts";
import { isNumberColumn, rowSchema, type TableKind } from "../../shared/schemas/lot.ts";
import { didYouMean, nearestWord } from "../../shared/schemas/nearest.ts";
import type { Remarks } from "./issues.ts";
import type { FileStyle, Target } from "./style.ts";
import { unitContradiction } from "./unit_hints.ts";

/** Where one column of a kind comes from. */
export interface PlannedColumn {
  readonly name: string;
  readonly isNumber: boolean;
  /** Index of the cell, −1 for a constant. */
  readonly cell: number;
  readonly constant: string | number | null;
  readonly times: number;
  readonly plus: number;
}

/** How the cells of a file become the columns of its kind. */
export interface ColumnPlan {
  readonly kind: TableKind;
  readonly cells: number;
  readonly columns: readonly PlannedColumn[];
  readonly decimal: "." | ",";
  readonly targets: readonly (Target | null)[];
}

/** Names of the columns that a file of a kind has to have: all but `u_…`, `measured_at` and `instrument`. */
export const requiredColumns = (kind: TableKind): string[] =>
  Object.entries(rowSchema(kind).shape).filter(([, field]) => !(field instanceof z.ZodOptional)).map((
    [name],
  ) => name);

/**
 * Reads the line of headings.
 * @throws InputError naming what is missing, what was found and what is near
 */
export function planColumns(
  kind: TableKind,
  name: string,
  line: number,
  headings: readonly string[],
  style: FileStyle,
  remarks: Remarks,
): ColumnPlan {
  const known = Object.keys(rowSchema(kind).shape);
  const place = { file: name, line };
  const targets = headings.map((heading): Target | null => {
    const target = style.columns.get(heading) ?? { to: heading, times: 1, plus: 0 };
    return known.includes(target.to) ? target : null;
  });
  const missing = requiredColumns(kind).filter((column) =>
    !style.constants.has(column) && !targets.some((target) => target?.to === column)
  );
  if (missing.length > 0) {
    refuseOtherDelimiter(kind, name, line, headings, style);
    throw new InputError(missingColumns(kind, `${name}:${line}`, headings, targets, missing), {
      ...place,
      column: missing[0]!,
    });
  }
  const source = new Map<string, number>();
  targets.forEach((target, i) => {
    if (target === null) return;
    const heading = headings[i]!;
    const first = source.get(target.to);
    if (first !== undefined || style.constants.has(target.to)) {
      const other = first === undefined
        ? `"constants" or "name_pattern" of lot.json`
        : `heading "${headings[first]}"`;
      throw new InputError(
        `Cannot read ${name}:${line}: column "${target.to}" comes twice, from heading "${heading}" and from ${other}; need one`,
        { ...place, column: target.to },
      );
    }
    source.set(target.to, i);
    refuseUnit(name, line, heading, heading, target);
  });
  headings.forEach((heading, i) => {
    if (targets[i] !== null) return;
    const unread = known.filter((column) => !source.has(column) && !style.constants.has(column));
    remarks.add(
      "extra_column",
      name,
      `column ${quoteValue(heading)} is not read${didYouMean(nearestWord(heading, unread))}`,
      line,
    );
  });
  const columns = known.map((column): PlannedColumn => {
    const cell = source.get(column) ?? -1;
    const { times, plus } = cell < 0 ? { times: 1, plus: 0 } : targets[cell]!;
    const constant = style.constants.get(column);
    return {
      name: column,
      isNumber: isNumberColumn(kind, column),
      cell,
      constant: constant === undefined || constant === "" ? null : constant,
      times,
      plus,
    };
  });
  return { kind, cells: headings.length, columns, decimal: style.decimal, targets };
}

/** Checks the row of units below the headings. @throws InputError for a unit that lot.json does not turn into the column's */
export function checkUnitsRow(
  plan: ColumnPlan,
  name: string,
  line: number,
  headings: readonly string[],
  units: readonly string[],
): void {
  plan.targets.forEach((target, i) => {
    if (target !== null) refuseUnit(name, line, headings[i] ?? "", units[i] ?? "", target);
  });
}

function refuseUnit(name: string, line: number, heading: string, stated: string, target: Target): void {
  const why = unitContradiction(stated, target);
  if (why === null) return;
  throw new InputError(
    `Cannot read ${name}:${line}: heading ${quoteValue(heading)} ${why}; correct "columns" in lot.json`,
    { file: name, line, column: target.to, value: stated },
  );
}

function missingColumns(
  kind: TableKind,
  at: string,
  headings: readonly string[],
  targets: readonly (Target | null)[],
  missing: readonly string[],
): string {
  const free = headings.filter((_, i) => targets[i] === null);
  const near = missing.flatMap((column) => {
    const heading = nearestWord(column, free);
    return heading === null ? [] : [[heading, column] as const];
  });
  const found = headings.slice(0, 30).map((heading) => quoteValue(heading)).join(", ");
  const [plural, are] = missing.length === 1 ? ["", "is"] : ["s", "are"];
  const example = near.length > 0 ? near : free.length > 0 ? [[free[0]!, missing[0]!] as const] : [];
  const map = example.map(([heading, column]) => `${quoteValue(heading)}: "${column}"`).join(", ");
  return `Cannot read ${at}: column${plural} ${
    missing.map((m) => `"${m}"`).join(", ")
  } ${are} missing; found headings ${found}` +
    (near.length === 0
      ? ""
      : `; nearest: ${near.map(([h, c]) => `${quoteValue(h)} for "${c}"`).join(", ")}`) +
    (map === "" ? "" : `; rename, or map in lot.json as in "columns": { "${kind}": { ${map} } }`);
}

/** Headings that only make sense with another delimiter. */
function refuseOtherDelimiter(
  kind: TableKind,
  name: string,
  line: number,
  headings: readonly string[],
  style: FileStyle,
): void {
  const text = headings.join("");
  const seen = [";", "\t", ",", "|"].find((mark) => mark !== style.delimiter && text.split(mark).length > 2);
  if (seen === undefined) return;
  const word = (mark: string) => mark === "\t" ? "a tab" : `"${mark}"`;
  throw new InputError(
    `Cannot read ${name}:${line}: the headings are separated by ${word(seen)}, need ${
      word(style.delimiter)
    }; ` +
      `declare it in lot.json: "reading_style": { "${kind}": { "delimiter": ${JSON.stringify(seen)} } }` +
      (seen === ";" ? `, with "decimal": "," if the numbers have decimal commas` : ""),
    { file: name, line, value: text.slice(0, 60) },
  );
}
