import type { ReviewData, ReviewFlag } from "../review_types.ts";
import { type Html, html } from "./html.ts";
import { foldedTable, type PageTable } from "./table.ts";

function refsText(flag: ReviewFlag): string[] {
  return flag.readings.slice(0, 6).map(({ file_name, lines }) => {
    // A JSON file is read as a whole: its rows have no lines of their own.
    if (file_name.endsWith(".json")) return file_name;
    const some = lines.slice(0, 8).map(([a, b]) => a === b ? String(a) : `${a}–${b}`).join(", ");
    const one = lines.length === 1 && lines[0]![0] === lines[0]![1];
    return `${file_name}, ${one ? "line" : "lines"} ${some}${lines.length > 8 ? " …" : ""}`;
  });
}

const SCOPE: Readonly<Record<string, string>> = { lot: "Lot", wafer: "Wafer", coating_run: "Coating run" };

export function flagsSection({ flags }: ReviewData): Html {
  if (flags.length === 0) return html`<p>Nothing is flagged.</p>`;
  const one = (f: ReviewFlag) =>
    html`
      <article
        class="flag ${f.severity}"><h3><span class="tag ${f.severity}">${f
          .severity}</span> ${SCOPE[f.scope]} ${f.id}: ${f.brief}</h3>
      <p>${f.statement}.</p>${f.suspects.length === 0
        ? null
        : html`<ul>${
          f.suspects.slice(0, 4).map((s) => html`<li>Suspect: ${s.sentence}.</li>`)
        }</ul>`}${f.readings.length === 0
        ? null
        : html`<p class="soft">Read in ${refsText(f).join("; ")}${
          f.readings.length > 6 ? ` and ${f.readings.length - 6} more files` : ""
        }.</p>`}</article>
    `;
  const table: PageTable = {
    caption: "All flags",
    file: "flags",
    columns: ["scope", "id", "rule", "severity", "statement", "readings", "suspects"].map((title) => ({
      title,
    })),
    rows: flags.map((f) => [
      f.scope,
      f.id,
      f.rule,
      f.severity,
      f.statement,
      refsText(f).join("; "),
      f.suspects.map((s) => s.sentence).join("; "),
    ]),
  };
  const notes = flags.filter((f) => f.severity === "note");
  return html`<p class="soft">act: decide at the review. watch: look at it. note: know it.</p>
${flags.filter((f) => f.severity !== "note").map(one)}${
    notes.length === 0
      ? null
      : html`<details><summary>${notes.length} ${notes.length === 1 ? "note" : "notes"}</summary>${
        notes.map(one)
      }</details>`
  }${foldedTable(table)}`;
}
