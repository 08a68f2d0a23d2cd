import type { ExplainedFigure, LimitMargin } from "../../models/decision/mod.ts";
import type { Figure } from "../../shared/schemas/figures.ts";
import { type Cell, textTable, wrap } from "../console/mod.ts";
import type { ExplainedRole, GuideExplained } from "../query/explain.ts";
import type { ReadingAdvice } from "../query/reading_advice.ts";
import { mostlyUnmatched } from "../query/limits.ts";
import { groupWords } from "../query/review/gains.ts";
import { SHORT } from "./figure_titles.ts";

const WIDTH = 80;
/** Figures whose shares stand side by side. */
const MOST_SHARES = 3;

const number = (x: number, digits = 3): string => String(Number(x.toPrecision(digits))).replace("-", "−");
const percent = (share: number): string => `${Math.round(100 * share)} %`;
const withU = (value: number, u: number | null): string =>
  u === null || u === 0 ? number(value, 4) : `${number(value, 4)} ± ${number(u, 2)}`;

/** A guide's decision in words and numbers, at most 80 columns wide. */
export function explainText(explained: GuideExplained): string {
  const { explanation: found, guide, request, decision } = explained;
  const parts = [
    [
      `${guide} for ${request}: ${decision}`,
      ...wrap(
        `Probability ${number(explained.probability, 4)} of ${explained.draws} draws; accepted from ` +
          `${explained.accept_at}, rejected below ${explained.reject_below}.` +
          (explained.unavailable === undefined ? "" : ` Unavailable: ${explained.unavailable}.`),
        WIDTH,
      ),
      ...limitLine(explained),
    ],
    ...found.figures.map(figureLines),
    [traitTable(explained)],
    readingLines(explained),
    restoreLines(explained),
  ];
  return parts.filter((lines) => lines.length > 0).map((lines) => lines.join("\n").trimEnd()).join("\n\n");
}

function limitLine(
  { limited_by, probability, explanation: { matched, draws, spectra } }: GuideExplained,
): string[] {
  const limit = limited_by === null
    ? "No requirement limits it."
    : matched < 1 && (limited_by === "operating_temperature_c" || mostlyUnmatched(probability, matched))
    ? `Limited by phase matching: ${percent(1 - matched)} of the draws match nowhere in the oven.`
    : `Limited by ${limited_by}.`;
  return wrap(
    `${limit} What follows is of ${draws} draws, ${spectra} of them with spectra of their own.`,
    WIDTH,
  );
}

function figureLines(figure: ExplainedFigure): string[] {
  if (figure.mean === null) return wrap(`${figure.figure}: none, ${figure.reason}`, WIDTH);
  const linear = figure.uLinear === null ? "linear u not told" : `linear ± ${number(figure.uLinear, 2)}`;
  const met = figure.probability === null ? "" : `; met in ${percent(figure.probability)} of the draws`;
  return [
    ...wrap(`${figure.figure} ${withU(figure.mean, figure.u)} (${linear})${met}`, WIDTH),
    ...(figure.reason === null ? [] : wrap(figure.reason, WIDTH - 2).map((line) => `  ${line}`)),
    ...figure.limits.flatMap((limit) => wrap(marginText(limit), WIDTH - 2).map((line) => `  ${line}`)),
  ];
}

/** How far inside its limit a figure is, and how far it would have to be. */
function marginText({ kind, limit, margin_u, guard_u }: LimitMargin): string {
  const bound = `${kind === "at_least" ? "at least" : "at most"} ${number(limit, 6)}`;
  if (margin_u === null) return `${bound}: no uncertainty, the mean decides`;
  const where = `${number(Math.abs(margin_u), 2)} u ${margin_u < 0 ? "outside" : "inside"} the limit`;
  if (guard_u === null) return `${bound}: ${where}`;
  const guard = margin_u >= guard_u ? "beyond" : margin_u >= 0 ? "within" : "past";
  return `${bound}: ${where}, ${guard} the guard band of ${
    number(guard_u, 2)
  } u that a normal figure needs alone`;
}

function traitTable({ traits, explanation: { figures } }: GuideExplained): string {
  const shown = figures.slice(0, MOST_SHARES);
  const columns = [
    { title: "trait" },
    { title: "value", align: "right" as const },
    { title: "basis" },
    ...shown.map((f) => ({ title: SHORT[f.figure] ?? f.figure, align: "right" as const })),
  ];
  const most = (row: ExplainedRole) => Math.max(...shown.map((f) => row.shares[f.figure] ?? -1), -1);
  const rows = [...traits].sort((a, b) => most(b) - most(a)).map((row): Cell[] => [
    traitName(row),
    row.value === null ? "–" : withU(row.value, row.u),
    basisText(row),
    ...shown.map((f) => shareText(row.shares[f.figure] ?? null)),
  ]);
  const rest = shown.map((f) => f.rest === null ? "–" : percent(Math.max(0, f.rest)));
  rows.push(["together, or as drawn", "", "", ...rest]);
  const resolved = Math.max(...shown.map((f) => f.resolution ?? 0), 0);
  const left = figures.length > MOST_SHARES ? `; of ${figures.length} figures the first ${MOST_SHARES}` : "";
  return textTable(columns, rows, { width: WIDTH }) +
    `Shares of the figure's variance${toldTo(resolved)}${left}`;
}

/** How far the shares may be off, where that shows in whole percent. */
const toldTo = (resolved: number): string => resolved < 0.005 ? "" : `, told to about ${percent(resolved)}`;

const shareText = (share: number | null): string => share === null ? "–" : percent(share);

function traitName({ trait, roles, wavelength_nm, polarisation }: ExplainedRole): string {
  const arms = roles.map((r) => r.split("_", 1)[0]!).filter((a) => ["pump", "signal", "idler"].includes(a));
  const at = wavelength_nm === null ? "" : ` ${number(wavelength_nm, 5)}`;
  const arm = arms.length === 0 ? "" : ` ${arms.map((a) => a[0]).join("+")}`;
  return `${trait}${arm}${at}${polarisation === null ? "" : ` ${polarisation}`}`;
}

const basisText = ({ basis, from }: ExplainedRole): string =>
  basis === "measured" || basis === "platform" || from === "" ? basis : `${basis} ${from}`;

function readingLines({ next_readings: readings, decision }: GuideExplained): string[] {
  if (decision !== "hold") return [];
  const best = readings.filter((r) => r.reduction > 0);
  if (best.length === 0) return ["No reading that could still be taken would settle the decision."];
  return [
    "What a reading would do to the doubt, and the decision that would follow:",
    ...best.slice(0, 3).flatMap((r) =>
      wrap(readingText(r), WIDTH - 2).map((line, k) => `${k === 0 ? "-" : " "} ${line}`)
    ),
  ];
}

/** One reading with what it is expected to bring. */
export function readingText(advice: ReadingAdvice): string {
  const { kind, reads, doubt, reduction, p_accept, p_hold, p_reject } = advice;
  const what = reads.map((r) => `${r.trait} to ± ${number(r.u, 2)}`).join(", ");
  const at = reads[0]!.wavelength_nm === null
    ? ""
    : ` at ${number(reads[0]!.wavelength_nm, 5)} nm ${reads[0]!.polarisation}`;
  return `${kind}${at} (${what}; u: ${reads[0]!.from}): takes away ${
    percent(reduction / doubt)
  } of the doubt; ` +
    `then accept ${percent(p_accept)}, hold ${percent(p_hold)}, reject ${percent(p_reject)}`;
}

function restoreLines({ as_made, restored }: GuideExplained): string[] {
  if (as_made === null || restored.length === 0) return [];
  const columns = [
    { title: "at target" },
    { title: "probability", align: "right" as const },
    { title: "rise", align: "right" as const },
    { title: "decision" },
  ];
  const rows = restored.map((r): Cell[] => [
    groupWords(r.group),
    r.probability.toFixed(3),
    (r.probability - as_made).toFixed(3).replace("-", "−"),
    r.decision,
  ]);
  return [
    `As made ${as_made.toFixed(3)}; with traits at their targets:`,
    textTable(columns, rows, { width: WIDTH }),
    ...(restored.some((r) => r.probability < as_made - NOTICEABLE) ? wrap(FITS_AS_MADE, WIDTH) : []),
  ];
}

/** A fall of a probability that needs a word. */
const NOTICEABLE = 0.02;
const FITS_AS_MADE =
  "A rise below 0: this guide stands for its die because it fits what was made; at the target another guide of the die may fit.";

/** Columns of the CSV: one row per trait and required figure. */
export const EXPLAIN_COLUMNS = [
  "guide",
  "figure",
  "mean",
  "u",
  "u_linear",
  "trait",
  "roles",
  "wavelength_nm",
  "polarisation",
  "value",
  "trait_u",
  "basis",
  "from",
  "share",
] as const;

export function explainRows({ guide, traits, explanation: { figures } }: GuideExplained): Cell[][] {
  return figures.flatMap((f) =>
    traits.map((t): Cell[] => [
      guide,
      f.figure,
      f.mean,
      f.u,
      f.uLinear,
      t.trait,
      t.roles.join(" "),
      t.wavelength_nm,
      t.polarisation,
      t.value,
      t.u,
      t.basis,
      t.from,
      t.shares[f.figure as Figure] ?? null,
    ])
  );
}
