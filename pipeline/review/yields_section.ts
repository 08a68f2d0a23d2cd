import type { RequestReview, ReviewData, ShareOf } from "../review_types.ts";
import { controlChart, limitChart, lotRows, yieldChart } from "./charts.ts";
import { type Html, html } from "./html.ts";
import { capitalised, percentText, shown } from "./numbers.ts";
import { figure } from "./plot.ts";
import { foldedTable, type PageTable } from "./table.ts";
import { waferChartsPart } from "./wafer_charts.ts";
import { requestYieldRows, YIELD_COLUMNS } from "./yield_rows.ts";

export function yieldsSection(data: ReviewData): Html {
  return html`${
    data.requests.map((r) => {
      const rows = [
        ...r.wafers.map((w) => ({ ...w, name: w.wafer })),
        ...(r.wafers.length > 1 ? [{ ...r.total, name: "whole lot" }] : []),
      ];
      const groups = r.groups.filter((g) => g.matched).map((g) => ({ ...g, name: `group ${g.group}` }));
      const table = yieldTable(`Yield for ${r.request}`, [...rows, ...groups]);
      const csv: PageTable = {
        caption: table.caption,
        file: `yield-${data.lot}-${r.request}`,
        columns: YIELD_COLUMNS.map((title) => ({ title })),
        rows: requestYieldRows(data, r),
      };
      const limits: PageTable = {
        caption: `What limits dies for ${r.request}`,
        file: `limits-${data.lot}-${r.request}`,
        columns: ["requirement", "rejected", "on hold", "would pass if it alone were met", "wafers"].map((
          title,
        ) => ({ title })),
        rows: r.limits.map((l) => [l.figure, l.rejected, l.on_hold, l.would_pass, l.wafers.join(", ")]),
      };
      return html`
        <h3>${r.request}</h3>
        <p>${r.description}. Required: ${r.requirements.map(requirementText).join(", ") ||
          "nothing"}. Accepted from probability ${shown(r.decide.accept_at)}, rejected below ${shown(
            r.decide.reject_below,
          )}.</p>
        <div class="pair">${figure(
          `Dies accepted, of those that can be shipped (filled), with exact 95 % intervals (Clopper–Pearson)${
            r.wafers.length > 1
              ? "; where wafers are taken together, for dies that share their wafer's fate"
              : ""
          }. Below (open): dies expected from the probabilities, with the range if a wafer's dies share their doubts.${
            groups.length > 1 ? " Groups: dies with an accepted guide of that mask group." : ""
          }`,
          yieldChart(
            `Yield for ${r.request} by wafer and group`,
            groups.length > 1 ? [...rows, ...groups] : rows,
          ),
          foldedTable(table, csv),
        )}${r.limits.length === 0 ? html`<p>No die that can be shipped is limited.</p>` : figure(
          "Dies that are not accepted, by the requirement that fails most often.",
          limitChart(`What limits dies for ${r.request}`, r.limits),
          foldedTable(limits),
        )}</div>
      `;
    })
  }${
    data.requests_without_match.length === 0
      ? null
      : html`<p class="soft">Predicted too, but no guide of this lot matches: ${
        data.requests_without_match.join(", ")
      }.</p>`
  }`;
}

/** Yields with every interval, as a page has room for them. */
function yieldTable(caption: string, rows: readonly (ShareOf & { readonly name: string })[]): PageTable {
  const interval = ({ low, high }: { readonly low: number; readonly high: number }) =>
    `${shown(100 * low)} to ${percentText(high)}`;
  return {
    caption: `${caption}; intervals and ranges at 95 %`,
    file: "",
    columns: [
      { title: "unit" },
      { title: "accepted" },
      { title: "on hold" },
      { title: "dies" },
      { title: "yield", show: (cell) => percentText(cell as number | null) },
      { title: "exact (Clopper–Pearson)" },
      { title: "score (Wilson)" },
      { title: "dies sharing their wafer's fate" },
      { title: "expected dies" },
      { title: "if independent" },
      { title: "if a wafer's dies share their doubts" },
    ],
    rows: rows.map((w) => [
      w.name,
      w.good,
      w.hold,
      w.of,
      w.value,
      interval(w.exact),
      interval(w.score),
      w.counted === "wafers" ? interval(w) : null,
      w.expected?.dies ?? null,
      w.expected === null ? null : `${w.expected.low} to ${w.expected.high}`,
      w.expected === null ? null : `${shown(w.expected.together_low)} to ${shown(w.expected.together_high)}`,
    ]),
  };
}

const requirementText = ({ figure: f, at_least, at_most }: RequestReview["requirements"][number]): string =>
  [
    f,
    at_least === null ? "" : `at least ${shown(at_least, 6)}`,
    at_most === null ? "" : `at most ${shown(at_most, 6)}`,
  ]
    .filter((t) => t !== "").join(" ");

export function chartsSection(data: ReviewData): Html {
  const yields = data.requests.flatMap((r) => {
    const rows = lotRows(data.lots, r.request);
    if (rows.length < 2) return [];
    const table: PageTable = {
      caption: `Yield for ${r.request} over lots`,
      file: `yield-over-lots-${r.request}`,
      columns: ["lot", "started", "accepted", "dies", "low", "high"].map((title) => ({ title })),
      rows: rows.map((l) => [l.lot, l.started, l.good, l.of, l.low, l.high]),
    };
    return [figure(
      `Dies accepted for ${r.request} over the lots of the platform, in the order of their start; intervals count dies as independent.`,
      yieldChart(`Yield for ${r.request} over lots`, rows),
      foldedTable(table),
    )];
  });
  const charts = data.charts.map((c) => {
    const table: PageTable = {
      caption: `${c.words} over lots`,
      file: `chart-${c.key.replaceAll(/[^A-Za-z0-9]+/g, "-").replace(/-+$/, "")}`,
      columns: ["lot", "value", "z", "centre", "lower limit", "upper limit"].map((title) => ({ title })),
      rows: c.points.map((p) => [p.lot, p.value, p.z, c.centre, c.lower, c.upper]),
    };
    const told = c.signals.length === 0
      ? "The lot is in line."
      : `Lot ${data.lot} is out of line: ${c.signals.join("; ")}.`;
    return figure(
      `${capitalised(c.words)}${c.unit === "" ? "" : `, ${c.unit}`}. ${told}`,
      controlChart(c),
      foldedTable(table),
    );
  });
  const few = data.flags.filter((f) => f.rule === "lot-chart" && data.charts.length === 0).map((f) =>
    html`<p>${f.statement}.</p>`
  );
  const aside = data.left_out.map((t) => html`<p class="soft">${t}.</p>`);
  if (charts.length > 0) {
    return html`
      <p
        class="soft">Individuals charts: centre and limits are those of the lots before (mean, and three times the mean moving range over 1.128, wider where they rest on few lots); a diamond marks a point that signals.</p>${yields}<div
        class="pair">${charts}</div>${waferChartsPart(data.wafer_charts, data.lot)}${aside}
    `;
  }
  return html`${few}${yields}${waferChartsPart(data.wafer_charts, data.lot)}${aside}`;
}
