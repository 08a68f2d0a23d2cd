import stringWidth from "string-width";
import type { ReadingKind } from "../../shared/schemas/readings.ts";
import type { Coverage, CoverageCell } from "./coverage.ts";

/** Widest line of the text, in columns of a terminal. */
const WIDTH = 80;

/** Kinds with a column, in order: those that say something about guides. */
const COLUMNS: readonly ReadingKind[] = [
  "cutback",
  "fringes",
  "poling",
  "walls",
  "modes",
  "geometry",
  "tuning",
];

/** What stands in where a kind has no reading of a guide. */
const OTHERWISE: Readonly<Record<ReadingKind, string>> = {
  cutback: "loss elsewhere: from fringes, else pooled from die, wafer and lot, else the platform's default",
  fringes: "loss elsewhere: from cut-back, else pooled from die, wafer and lot, else the platform's default",
  poling: "poling elsewhere: walls where complete, else duty pooled from die, wafer and lot, else the design",
  walls: "poling elsewhere: window summaries, else pooled duty, else the design",
  facets: "coating runs without a spectrum: the platform's coated default; dies without a coating: bare",
  modes: "mode sizes elsewhere: pooled from die, wafer and lot, else the platform's default",
  geometry: "geometry elsewhere: as designed, and the platform's process",
  tuning: "phase matching elsewhere: calculated from geometry and index, without a measured offset",
  outcomes: "nothing is inferred from them: they check predictions",
};

/** The coverage of a lot as text of at most 80 columns: what is measured, and what will be inferred from where. */
export function coverageText(coverage: Coverage): string {
  return [
    ...table(coverage),
    "",
    ...Object.keys(OTHERWISE).flatMap((kind) => kindLines(coverage, kind as ReadingKind)),
  ]
    .join("\n") + "\n";
}

function table(coverage: Coverage): string[] {
  const kinds = COLUMNS.filter((kind) => coverage.rows.some((row) => !isEmpty(row.cells[kind])));
  const head = ["guides", ...kinds];
  const body = coverage.rows.map((
    row,
  ) => [String(row.guides), ...kinds.map((kind) => cellText(row.cells[kind]))]);
  const widths = head.map((title, i) => Math.max(title.length, ...body.map((cells) => cells[i]!.length)));
  const rest = widths.reduce((sum, width) => sum + width + 2, 0);
  const first = Math.min(
    Math.max(WIDTH - rest, 8),
    Math.max(coverage.by.length, ...coverage.rows.map((row) => stringWidth(row.unit))),
  );
  const line = (unit: string, cells: readonly string[]) =>
    padded(unit, first) + cells.map((cell, i) => `  ${cell.padStart(widths[i]!)}`).join("");
  const any = (has: (cell: CoverageCell) => boolean) =>
    coverage.rows.some((row) => kinds.some((kind) => has(row.cells[kind])));
  const legend = [
    "number of guides with readings",
    ...any((cell) => cell.dies > 0) ? ["d: readings of a whole die"] : [],
    ...any((cell) => cell.wafer) ? ["w: of the whole wafer"] : [],
  ];
  return [
    line(coverage.by, head),
    ...coverage.rows.map((row, i) => line(row.unit, body[i]!)),
    ...wrapped(`${" ".repeat(4)}${legend.join("; ")}`, 4),
  ];
}

const isEmpty = (cell: CoverageCell): boolean => cell.guides === 0 && cell.dies === 0 && !cell.wafer;

function cellText(cell: CoverageCell): string {
  if (isEmpty(cell)) return "-";
  return (cell.guides > 0 ? String(cell.guides) : "") + (cell.dies > 0 ? "d" : "") + (cell.wafer ? "w" : "");
}

function kindLines(coverage: Coverage, kind: ReadingKind): string[] {
  const { guides, dies, wafers } = coverage.totals[kind];
  const have = kind === "facets"
    ? `${coverage.coatingsWithSpectrum} of ${plural(coverage.coatings, "coating run")}`
    : [
      `${guides} of ${plural(coverage.guides, "guide")}`,
      ...dies > 0 ? [`${plural(dies, "whole die")}`] : [],
      ...wafers > 0 ? [`${plural(wafers, "whole wafer")}`] : [],
    ].join(", ");
  return wrapped(`${kind.padEnd(9)} ${have}; ${OTHERWISE[kind]}`, 10);
}

const plural = (n: number, word: string): string => `${n} ${word}${n === 1 ? "" : "s"}`;

function wrapped(text: string, indent: number): string[] {
  const lines: string[] = [];
  let line = text.slice(0, indent);
  for (const word of text.slice(indent).split(" ")) {
    if (line.trimEnd() !== "" && stringWidth(line) + word.length + 1 > WIDTH) {
      lines.push(line.trimEnd());
      line = " ".repeat(indent);
    }
    line += `${line.endsWith(" ") ? "" : " "}${word}`;
  }
  return [...lines, line];
}

/** Text cut or filled to a width of terminal columns. */
function padded(text: string, width: number): string {
  let out = text;
  while (stringWidth(out) > width) out = `${[...out].slice(0, out.endsWith("…") ? -2 : -1).join("")}…`;
  return out + " ".repeat(width - stringWidth(out));
}
