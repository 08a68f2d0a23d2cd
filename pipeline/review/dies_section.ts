import { budgetBasis } from "../budget_basis.ts";
import type { FigureValue, RankedDie, RequestReview, ReviewData } from "../review_types.ts";
import type { Cell } from "../console/mod.ts";
import { budgetChart } from "./charts.ts";
import { type Html, html } from "./html.ts";
import { withU } from "./numbers.ts";
import { figure } from "./plot.ts";
import { csvLink, foldedTable, type PageTable, tableOf } from "./table.ts";

/** Dies in the visible ranking; the CSV has all. */
const TOP = 30;

/** Dies of each request in its order; on the page value, u and basis of a figure share a cell, in the CSV they don't. */
export function diesSection({ lot, requests }: ReviewData): Html {
  return html`${
    requests.map((r) => {
      const all = csvTable(lot, r);
      return html`<h3>${r.request}</h3>${tableOf(pageTable(r), TOP)}${
        r.ranked.length > TOP
          ? html`<p class="soft">The first ${TOP} of ${r.ranked.length} dies; the CSV has all.</p>`
          : null
      }${csvLink(all)}`;
    })
  }`;
}

const captionOf = (r: RequestReview) =>
  `Dies for ${r.request}: accepted first, then on hold, in the order of ${r.order_by}`;

const figuresOf = (r: RequestReview): string[] => [...new Set(r.requirements.map((q) => q.figure))];

function csvTable(lot: string, r: RequestReview): PageTable {
  const figures = figuresOf(r);
  return {
    caption: captionOf(r),
    file: `ranked-${lot}-${r.request}`,
    columns: [
      "die",
      "guide",
      "decision",
      "probability",
      "operating_temperature_c",
      ...figures.flatMap((f) => [f, `${f}.u`, `${f}.basis`]),
      "qualifying_guides",
      "guides_of_die",
      "limited_by",
      "unavailable",
    ].map((title) => ({ title })),
    rows: r.ranked.map((d) => [
      d.die,
      d.guide,
      d.decision,
      d.probability,
      temperatureOf(d),
      ...figures.flatMap((f) => [d.figures[f]!.mean, d.figures[f]!.u, d.figures[f]!.basis]),
      d.qualifying_guides,
      d.guides_of_die,
      d.limited_by,
      d.unavailable,
    ]),
  };
}

/** Of a guide that matches nowhere the temperature is only the nearest one: none to set an oven to. */
const temperatureOf = (d: RankedDie): number | null => d.matched ? d.operating_temperature_c.mean : null;

function pageTable(r: RequestReview): PageTable {
  const figures = figuresOf(r);
  const byDie = new Map(r.ranked.map((d) => [d.die, d]));
  const of = (row: readonly Cell[]) => byDie.get(String(row[0]))!;
  return {
    caption: captionOf(r),
    file: "",
    columns: [
      { title: "die" },
      { title: "best guide" },
      { title: "decision", show: (_, row) => verdictOf(of(row)) },
      { title: "probability", digits: 3 },
      { title: "oven, °C", digits: 3 },
      ...figures.map((f) => ({
        title: f,
        show: (_: Cell, row: readonly Cell[]) => valueCell(of(row).figures[f]!),
      })),
      { title: "passing guides" },
      { title: "limited by" },
    ],
    rows: r.ranked.map((d) => [
      d.die,
      d.guide.slice(d.die.length + 1),
      d.decision,
      d.probability,
      temperatureOf(d),
      ...figures.map((f) => d.figures[f]!.mean),
      `${d.qualifying_guides} of ${d.guides_of_die}`,
      d.unavailable ?? d.limited_by,
    ]),
  };
}

function verdictOf(d: RankedDie): Html {
  return d.unavailable === null
    ? html`<span class="verdict"><span class="tag ${d.decision}">${
      d.decision[0]!.toUpperCase()
    }</span> ${d.decision}</span>`
    : html`<span class="verdict"><span class="tag none">×</span> not shipped</span>`;
}

const valueCell = ({ mean, u, basis }: FigureValue): Html =>
  html`${withU(mean, u)}${mean === null ? null : html`<span class="basis">${basis}</span>`}`;

export function budgetSection(data: ReviewData): Html {
  const paired = data.requests.filter((r) => r.budgets.length > 0);
  return html`${
    paired.map((r) =>
      html`
        <h3>${r.request}</h3>
        <div class="pair">${r.budgets.map((b) => {
          const table: PageTable = {
            caption: `Heralding budget of the ${b.which} die, ${b.guide}, for ${r.request}`,
            file: `budget-${b.which}-${data.lot}-${r.request}`,
            columns: ["factor", "signal", "u", "basis", "idler", "u", "basis"].map((title) => ({ title })),
            rows: b.rows.map((
              row,
            ) => [
              row.factor,
              row.signal.mean,
              row.signal.u,
              budgetBasis(row.factor, row.signal),
              row.idler.mean,
              row.idler.u,
              budgetBasis(row.factor, row.idler),
            ]),
          };
          return figure(
            `${
              b.which === "best" ? "Best" : "Median"
            } die: ${b.guide}. Circles: signal; squares: idler; bars: ± 2 u. The heralding efficiency is the product of the factors.`,
            budgetChart(`Heralding budget of ${b.guide} for ${r.request}`, b.rows),
            foldedTable(table),
          );
        })}</div>
      `
    )
  }`;
}
