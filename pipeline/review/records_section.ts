import { compareIds } from "../../shared/ids.ts";
import type { ReviewData } from "../review_types.ts";
import { basisChart } from "./charts.ts";
import { type Html, html } from "./html.ts";
import { figure } from "./plot.ts";
import { csvLink, foldedTable, type PageTable, tableOf } from "./table.ts";

/** Rows and remarks shown; the CSV and the ledger have all. */
const TOP = 30;

export function coverageSection(data: ReviewData): Html {
  const read: PageTable = {
    caption: "Guides and dies with a reading of their own",
    file: `coverage-${data.lot}`,
    columns: ["trait", "guides", "of guides", "dies", "of dies"].map((title) => ({ title })),
    rows: data.coverage.map((c) => [c.what, c.guides, c.of_guides, c.dies, c.of_dies]),
  };
  const bases = html`<p class="keys">${
    (["measured", "die", "wafer", "lot", "platform"] as const).map((b) =>
      html`
        <span class="key"><span class="tag basis-${b}">&nbsp;</span> ${b === "measured"
          ? "measured on the guide"
          : b === "platform"
          ? "platform's default"
          : `from its ${b}`}</span>
      `
    )
  }</p>`;
  return html`${tableOf(read)}${csvLink(read)}${data.requests.length === 0 ? null : bases}${
    data.requests.map((r) =>
      figure(
        `What the matched guides' numbers for ${r.request} rest on.`,
        basisChart(`Basis of the traits for ${r.request}`, r.rests_on),
        foldedTable({
          caption: `Basis of the traits for ${r.request}`,
          file: `basis-${data.lot}-${r.request}`,
          columns: ["role", "trait", "basis", "guides"].map((title) => ({ title })),
          rows: r.rests_on.map((x) => [x.role, x.trait, x.basis, x.guides]),
        }),
      )
    )
  }`;
}

export function recordsSection(data: ReviewData): Html {
  const steps: PageTable = {
    caption: "Steps of every wafer",
    file: `steps-${data.lot}`,
    columns: ["wafer", "step", "tool", "recipe", "finished"].map((title) => ({ title })),
    rows: data.wafers.flatMap((w) => w.steps.map((s) => [w.wafer, s.step, s.tool, s.recipe, s.finished])),
  };
  const aside: PageTable = {
    caption: "Rows kept aside",
    file: `quarantine-${data.lot}`,
    columns: ["file", "line", "column", "value", "reason", "wanted"].map((title) => ({ title })),
    rows: data.quarantine.map((q) => [q.file, q.line, q.column, q.value, q.reason, q.wanted]),
  };
  return html`${
    data.wafers.map((w) =>
      html`<p>${w.wafer}${w.substrate_batch === null ? "" : `, substrate batch ${w.substrate_batch}`}: ${
        w.steps.map((s) =>
          `${s.step}${s.tool === null ? "" : ` on ${s.tool}`}${s.recipe === null ? "" : ` (${s.recipe})`}`
        ).join(", ") || "no step recorded"
      }.</p>`
    )
  }${
    data.coatings.length === 0
      ? html`<p>No die is coated.</p>`
      : html`<p>Coatings: ${
        [...data.coatings].sort((a, b) => compareIds(a.coating_run, b.coating_run)).map((c) =>
          `${c.coating_run} (${c.facet}) on ${c.dies} dies`
        ).join(", ")
      }.</p>`
  }${foldedTable(steps)}${
    data.quarantine.length === 0
      ? html`<p>No row was kept aside.</p>`
      : html`${tableOf(aside, TOP)}${csvLink(aside)}`
  }${
    data.remarks.length === 0
      ? null
      : html`<h3>Remarks on readings</h3><ul>${
        data.remarks.slice(0, TOP).map((r) => html`<li>${r}</li>`)
      }</ul>${
        data.remarks.length > TOP ? html`<p class="soft">and ${data.remarks.length - TOP} more.</p>` : null
      }`
  }`;
}

export function methodSection({ provenance, cautions, platform }: ReviewData): Html {
  const files: PageTable = {
    caption: "Files in force, with their SHA-256",
    file: "files",
    columns: ["name", "sha256"].map((title) => ({ title })),
    rows: [
      ...provenance.files.map((f) => [f.name, f.sha256]),
      [`platform ${platform}`, provenance.platform_sha256],
      ...provenance.requests.map((r) => [`request ${r.request}`, r.sha256]),
    ],
  };
  return html`
    <div class="caution">
      <h3>Cautions</h3>
      <ul>${cautions.map((c) => html`<li>${c}</li>`)}</ul>
    </div>
    <ul>
      <li>A die is decided by its best guide: accepted when the guide meets every requirement in at least the asked share of 256 seeded draws of its traits (JCGM 101, JCGM 106), rejected when in too few, else on hold.</li>
      <li>Intervals of yields: exact (Clopper &amp; Pearson 1934) and score (Wilson 1927); where wafers are taken together, exact with an effective number of dies (Korn &amp; Graubard 1998). Expected dies are the sum of the probabilities; their range holds for independent dies, the wider one if all dies of a wafer share their doubts.</li>
      <li>Traits at target: the same draws computed again with one group of traits at the platform's targets. What the single rises leave of the whole rise is the interaction.</li>
      <li>Lots in time: individuals charts with limits from the lots before (NIST/SEMATECH e-Handbook, 6.3.2.2). Wafers: means and standard deviations of dies (6.3.2.1); as wafers of different lots differ by nature, a wafer is judged by how wafers and lots before differed (Satterthwaite 1946). Only lots computed by the same model version from the same files are compared.</li>
      <li>Growth of a spread: ratio of variances (e-Handbook, 1.3.5.9), corrected for all wafers and traits compared (Holm 1979), with allowance for readings worse than before.</li>
      <li>Capability: cp with its interval by chi-squared, cpk with Bissell's (1990), of die means as read: the readings' own uncertainty makes it look worse, not better.</li>
      <li>Suspects: Fisher's exact test, dealt among what shares its fate as a whole (wafers where a step is a wafer's), corrected for everything tried (Holm 1979).</li>
      <li>Trends over the wafer: least squares on slope and bow with F tests; the edge by Welch's test; neighbours by Moran's I of what the trend leaves. Told below p = 0.01, each by itself: with many traits one in a hundred is told by chance.</li>
      <li>A trait of a die is the mean of its readings, weighted by their u and the prior spread between guides.</li>
    </ul>
    <p>Runs: ${provenance.runs.map((r) => `${r.run}${r.request === null ? "" : ` (${r.request})`}`).join(
      ", ",
    )}.</p>${foldedTable(files)}
  `;
}
