import { type Cell, csvText } from "../console/mod.ts";
import { csvAddress, type Html, html } from "./html.ts";
import { shown } from "./numbers.ts";

export interface PageColumn {
  readonly title: string;
  /** Significant digits of numbers; 4 if left out. The CSV has them all. */
  readonly digits?: number;
  /** Shown instead of the cell; the CSV keeps the cell. */
  readonly show?: (cell: Cell, row: readonly Cell[]) => Html | string;
}

export interface PageTable {
  readonly caption: string;
  /** File name of the CSV, without its ending. */
  readonly file: string;
  readonly columns: readonly PageColumn[];
  readonly rows: readonly (readonly Cell[])[];
}

const cellOf = (column: PageColumn, cell: Cell, row: readonly Cell[]): Html | string =>
  column.show?.(cell, row) ??
    (typeof cell === "number" ? shown(cell, column.digits ?? 4) : String(cell ?? "–"));

/** The table itself, in a region that scrolls sideways by itself on a narrow screen and can be reached by keyboard. */
export function tableOf({ caption, columns, rows }: PageTable, most = Infinity): Html {
  const numeric = columns.map((_, k) => rows.some((r) => typeof r[k] === "number"));
  return html`
    <div class="scroll" role="region" aria-label="${caption}" tabindex="0">
      <table ${columns.length > 8
        ? html`
          class="${columns.length > 10 ? "wide widest" : "wide"}"
        `
        : null}>
        <caption>${caption}</caption>
        <thead>
          <tr>${columns.map((c, k) =>
            html`
              <th scope="col" ${numeric[k]
                ? html`
                  class="n"
                `
                : null}>${c.title}</th>
            `
          )}</tr>
        </thead>
        <tbody>${rows.slice(0, most).map((row) =>
          html`
            <tr>${columns.map((c, k) =>
              k === 0 ? html`<th scope="row">${cellOf(c, row[k], row)}</th>` : html`<td${
                numeric[k]
                  ? html`
                    class="n"
                  `
                  : null
              }>${cellOf(c, row[k], row)}</td>`
            )}</tr>
          `
        )}</tbody>
      </table>
    </div>
  `;
}

/** A link that saves the table as CSV, all of its rows; it needs no script. */
export function csvLink({ caption, file, columns, rows }: PageTable): Html {
  const csv = csvText(columns.map((c) => c.title), rows);
  return html`
    <p
      class="csv"><a download="${file}.csv" href="${csvAddress(
        csv,
      )}">CSV<span class="unseen"> of ${caption}</span></a> (${rows.length} rows)</p>
  `;
}

/** A table that opens on demand: what stands under a picture. The CSV may hold more columns than the page has room for. */
export function foldedTable(table: PageTable, csv: PageTable = table): Html {
  return html`<details class="data"><summary>Table: ${table.caption}</summary>${tableOf(table)}${
    csvLink(csv)
  }</details>`;
}
