import type { z } from "zod";
import { quoteValue } from "../../shared/errors.ts";
import { rowSchema } from "../../shared/schemas/lot.ts";
import type { ColumnPlan, PlannedColumn } from "./headings.ts";
import type { Problem } from "./issues.ts";
import { parseNumber } from "./number_cell.ts";
import { wanted } from "./style.ts";

/** Values of a row by column; null is an empty cell. */
export type Values = Readonly<Record<string, string | number | null>>;

/** A row's values, or what is wrong with it: the first problem, which also says how many more there are. */
export type Checked = { readonly values: Values; readonly problem?: undefined } | {
  readonly problem: Problem;
};

/** Turns the cells of a row into numbers and text, and checks them against the schema of the kind. */
export function checkRow(plan: ColumnPlan, cells: readonly string[]): Checked {
  if (cells.length !== plan.cells) return { problem: wrongCellCount(plan, cells) };
  const values: Record<string, string | number | null> = Object.create(null);
  const problems: Problem[] = [];
  for (const column of plan.columns) {
    const value = valueOf(plan, column, cells);
    if (typeof value === "object" && value !== null) problems.push(value);
    else values[column.name] = value;
  }
  if (problems.length === 0) {
    const checked = rowSchema(plan.kind).safeParse({ ...values }, { reportInput: true });
    if (checked.success) return { values };
    for (const issue of checked.error.issues) problems.push(problemOf(plan, cells, values, issue));
  }
  const [first, ...more] = problems;
  const others = [...new Set(more.map((p) => p.column))].filter((c) => c !== first!.column);
  return {
    problem: others.length === 0
      ? first!
      : { ...first!, reason: `${first!.reason} (also wrong: ${others.join(", ")})` },
  };
}

function valueOf(
  plan: ColumnPlan,
  column: PlannedColumn,
  cells: readonly string[],
): string | number | null | Problem {
  if (column.cell < 0) return column.constant;
  const cell = cells[column.cell]!;
  if (cell === "") return null;
  if (!column.isNumber) return cell;
  const number = parseNumber(cell, plan.decimal);
  if (typeof number !== "number") {
    const want = wanted(plan.kind, column.name) + (number.hint === undefined ? "" : `, ${number.hint}`);
    return { column: column.name, value: cell, reason: number.reason, wanted: want };
  }
  return column.times === 1 && column.plus === 0 ? number : number * column.times + column.plus;
}

function wrongCellCount(plan: ColumnPlan, cells: readonly string[]): Problem {
  const commas = plan.decimal === "." && cells.length > plan.cells
    ? "; a number with a decimal comma, or text with a delimiter in it, has to be quoted"
    : "";
  return {
    column: "",
    value: cells.slice(0, 20).join(" | "),
    reason: `the row has ${cells.length} ${
      cells.length === 1 ? "cell" : "cells"
    }, the headings ${plan.cells}`,
    wanted: `${plan.cells} cells${commas}`,
  };
}

function problemOf(
  plan: ColumnPlan,
  cells: readonly string[],
  values: Values,
  issue: z.core.$ZodIssue,
): Problem {
  const column = String(issue.path[0] ?? "");
  const planned = plan.columns.find((c) => c.name === column);
  const cell = planned === undefined || planned.cell < 0
    ? String(planned?.constant ?? "")
    : cells[planned.cell]!;
  const value = values[column];
  const number = typeof value === "number" && String(value) !== cell ? ` (${value} as "${column}")` : "";
  return {
    column,
    value: cell,
    reason: reasonOf(issue, value === null || value === undefined) + number,
    wanted: lastPart(column, cell) ?? wanted(plan.kind, column),
  };
}

/** A full id in the column of a name: its last part is what belongs there. */
const lastPart = (column: string, cell: string): string | null =>
  (column === "die" || column === "guide") && /^[^/]+(\/[^/]+)+$/.test(cell)
    ? quoteValue(cell.slice(cell.lastIndexOf("/") + 1))
    : null;

function reasonOf(issue: z.core.$ZodIssue, empty: boolean): string {
  if (empty) return "the cell is empty";
  switch (issue.code) {
    case "too_small":
      return issue.origin === "string"
        ? "the text is too short"
        : `the value is ${issue.inclusive ? "below" : "not above"} ${issue.minimum}`;
    case "too_big":
      return issue.origin === "string" ? "the text is too long" : `the value is above ${issue.maximum}`;
    case "invalid_type":
      return issue.expected === "int" ? "the value is not a whole number" : "the value is of the wrong type";
    case "invalid_value":
      return "the word is not one of those known";
    case "invalid_format":
    case "invalid_union": // of date and time
      return "the text has another form";
    default:
      return issue.message;
  }
}
