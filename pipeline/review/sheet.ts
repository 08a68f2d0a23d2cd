import { budgetBasis } from "../budget_basis.ts";
import type { FigureValue, SheetData, SheetRequest } from "../review_types.ts";
import { page } from "./frame.ts";
import { type Html, html } from "./html.ts";
import { shown, withU } from "./numbers.ts";
import { tableOf } from "./table.ts";

/** Rows of readings and of requests on the sheet: it has to fit one page of A4. */
const READINGS = 7;
const REQUESTS = 3;

const CSS = `
.pair { display: flex; flex-wrap: wrap; gap: 0 2rem; }
.pair > section { flex: 1 1 20rem; }
.pair > .scroll { flex: 0 1 auto; }
h2 { font-size: 1.05rem; margin: .8rem 0 .3rem; }
.decided { font-size: 1.05rem; }
.hash { font-size: .82rem; color: var(--soft); }
@media print {
  html { font-size: 7.4pt; line-height: 1.25; }
  .answers, .pair { gap: 0 1rem; }
  header p, figcaption, caption { margin: 0; padding: 0; }
  ol, ul { padding-left: 1.4rem; }
  h1 { font-size: 1.5rem; }
  h2 { margin: .4rem 0 .1rem; padding: 0; }
  td, th { white-space: nowrap; }
  td:last-child { white-space: normal; }
  table { font-size: .95rem; }
  th, td { padding: .06rem .5rem .06rem 0; }
  p, ul { margin: .15rem 0; }
  .caution { margin: .3rem 0; }
  .caution h2 { margin: 0; }
}
`;

/** The page that travels with a chip. */
export function sheetPage(data: SheetData): string {
  const shownRequests = data.requests.slice(0, REQUESTS);
  return page(
    `Die ${data.die}`,
    html`
      <header>
        <h1>Die ${data.die}</h1>
        <p
          class="soft">Lot ${data.lot}, platform ${data.platform}. Calculated by ${data.provenance
            .program}, model ${data.provenance.model}: predictions, not a test certificate.</p>
      </header>
      <main id="main">
      ${data.unavailable === null
        ? null
        : html`<p class="caution"><strong>This die can't be shipped:</strong> ${data.unavailable}.</p>`}
      <div class="pair"><section aria-labelledby="identity"><h2 id="identity">Identity</h2>${identity(
        data,
      )}</section>
      <section aria-labelledby="history"><h2 id="history">History</h2>${history(data)}</section></div>
      ${shownRequests.length === 0
        ? html`<p>No request that was predicted has an operating point on this lot.</p>`
        : shownRequests.map((r, k) => requestSection(r, k))}
      ${data.requests.length > REQUESTS
        ? html`<p class="soft">Predicted too: ${
          data.requests.slice(REQUESTS).map((r) => `${r.request} (${r.decision})`).join(", ")
        }.</p>`
        : null}
      <section aria-labelledby="readings"><h2 id="readings">Read on this die</h2>${readings(data)}</section>
      <section class="caution" aria-labelledby="cautions"><h2 id="cautions">Cautions</h2><ul>${data.cautions
        .map((c) => html`<li>${c}</li>`)}</ul></section>
      <section aria-labelledby="provenance"><h2 id="provenance">Provenance (SHA-256)</h2>${provenance(
        data,
      )}</section>
      </main>
    `,
    CSS,
  );
}

function identity(d: SheetData): Html {
  const [first] = d.guides;
  const same = <K extends "length_mm" | "width_um">(key: K) =>
    new Set(d.guides.map((g) => g[key])).size === 1;
  return html`
    <dl>
      <dt>wafer</dt>
      <dd>${d.wafer}${d.substrate_batch === null ? "" : `, substrate batch ${d.substrate_batch}`}</dd>
      <dt>place</dt>
      <dd>x ${shown(d.x_mm, 4)} mm, y ${shown(
        d.y_mm,
        4,
      )} mm from the centre, notch at −y, seen from the guide side</dd>
      <dt>guides</dt>
      <dd>${d.guides.map((g) =>
        `${g.guide.slice(d.die.length + 1)} (${shown(g.period_um, 6)} µm${
          g.group === null ? "" : `, ${g.group}`
        })`
      ).join(", ")}</dd>
      <dt>length</dt>
      <dd>${same("length_mm") ? `${shown(first!.length_mm, 4)} mm` : "differs by guide"}${same("width_um")
        ? `; width ${shown(first!.width_um, 4)} µm`
        : ""}</dd>
      <dt>facets</dt>
      <dd>${d.coatings.filter((c) => c.counts).map((c) => `${c.facet}: coating run ${c.coating_run}`).join(
        "; ",
      ) || "no coating recorded: bare"}</dd>
    </dl>
  `;
}

function history(d: SheetData): Html {
  if (d.steps.length === 0) return html`<p>No step is recorded.</p>`;
  return html`<ol>${
    d.steps.map((s) =>
      html`<li>${s.step}${s.tool === null ? "" : ` on ${s.tool}`}${
        s.recipe === null ? "" : `, recipe ${s.recipe}`
      }${s.finished === null ? "" : `, ${s.finished.slice(0, 10)}`}</li>`
    )
  }</ol>`;
}

function requestSection(r: SheetRequest, k: number): Html {
  const t = r.figures.operating_temperature_c;
  const oven = t === undefined
    ? "no operating temperature"
    : r.matched
    ? `oven at ${withU(t.mean, t.u)} °C (${t.basis})`
    : `nothing matches between ${r.oven_c[0]} and ${r.oven_c[1]} °C; nearest is ${shown(t.mean)} °C`;
  const others = r.other_temperatures_c.length === 0
    ? ""
    : `; also at ${r.other_temperatures_c.join(", ")} °C`;
  const limits = new Map(r.requirements.map((q) => [q.figure, q]));
  const rows = Object.entries(r.figures).filter(([f]) => f !== "operating_temperature_c");
  return html`
    <section aria-labelledby="request-${k}"><h2 id="request-${k}">For ${r.request}</h2>
    <p class="decided"><span class="tag ${r.decision}">${r.decision}</span> Guide <strong>${r
      .guide}</strong>, probability ${shown(
        r.probability,
      )} that it meets every requirement${r.limited_by === null || r.decision === "accept"
      ? ""
      : `; limited by ${r.limited_by}`}; ${oven}${others}.</p>
    <p>${r.description}. ${r.pump.length === 0
      ? ""
      : `Light: ${r.pump.join("; ")}. Powers are inside the guide.`}</p>
    <div class="pair">${tableOf({
      caption: `Predicted for ${r.request}`,
      file: "",
      columns: [
        { title: "figure" },
        { title: "value ± u", show: (_, row) => withU(row[1] as number | null, row[5] as number | null) },
        { title: "95 %" },
        { title: "rests on" },
        { title: "asked" },
      ],
      rows: rows.map(([f, v]) => [f, v.mean, rangeOf(v), v.basis, asked(limits.get(f)), v.u]),
    })}${r.budget.length === 0 ? null : tableOf({
      caption: "Heralding budget",
      file: "",
      columns: [{ title: "factor" }, { title: "signal" }, { title: "idler" }, { title: "rests on" }],
      rows: r.budget.map((
        b,
      ) => [
        b.factor,
        withU(b.signal.mean, b.signal.u),
        withU(b.idler.mean, b.idler.u),
        [...new Set([b.signal, b.idler].map((arm) => budgetBasis(b.factor, arm)))].join(", "),
      ]),
    })}</div>${r.remarks.length === 0
      ? null
      : html`<p class="soft">Remarks: ${r.remarks.slice(0, 3).join("; ")}${
        r.remarks.length > 3 ? " …" : ""
      }.</p>`}</section>
  `;
}

const rangeOf = (v: FigureValue): string =>
  v.lo === null || v.hi === null ? "–" : `${shown(v.lo)} to ${shown(v.hi)}`;

const asked = (q: SheetRequest["requirements"][number] | undefined): string =>
  q === undefined ? "" : [
    q.at_least === null ? "" : `≥ ${shown(q.at_least, 6)}`,
    q.at_most === null ? "" : `≤ ${shown(q.at_most, 6)}`,
  ].filter((t) => t !== "").join(", ");

function readings(d: SheetData): Html {
  if (d.readings.length === 0) {
    return html`<p>Nothing was read on this die itself; every prediction rests on its wafer, its lot or the platform.</p>`;
  }
  const recommended = new Set(d.requests.map((r) => r.guide));
  // The recommended guides first, then the rest, as far as the page goes.
  const sorted = [...d.readings].sort((a, b) =>
    Number(recommended.has(b.unit)) - Number(recommended.has(a.unit))
  );
  const rest = sorted.length - READINGS;
  return html`${
    tableOf({
      caption: "Readings, reduced to traits",
      file: "",
      columns: ["trait", "of", "at", "value ± u", "method", "read in"].map((title) => ({ title })),
      rows: sorted.slice(0, READINGS).map((r) => [
        r.trait,
        r.unit.slice(d.die.length + 1) || "die",
        r.wavelength_nm === null ? "" : `${shown(r.wavelength_nm, 5)} nm ${r.polarisation ?? ""}`,
        withU(r.value, r.u),
        r.method,
        r.readings.slice(0, 2).map((ref) =>
          `${ref.file_name}:${
            ref.lines.slice(0, 3).map(([a, b]) => a === b ? String(a) : `${a}–${b}`).join(", ")
          }`
        ).join("; "),
      ]),
    })
  }${
    rest > 0
      ? html`<p class="soft">and ${rest} more ${rest === 1 ? "trait" : "traits"} in the ledger.</p>`
      : null
  }`;
}

function provenance({ provenance: p, platform, readings: rows, requests }: SheetData): Html {
  const files = new Map(
    rows.flatMap((r) => r.readings.slice(0, 2).map((ref) => [ref.file_name, ref.source_file] as const)),
  );
  const names = new Set(requests.map((r) => r.request));
  const list: [string, string][] = [
    [`platform ${platform}`, p.platform_sha256],
    ...p.requests.filter((r) => names.has(r.request)).map((
      r,
    ): [string, string] => [`request ${r.request}`, r.sha256]),
    ...[...files].slice(0, 6),
  ];
  return html`
    <p
      class="hash">Runs ${p.runs.filter((r) => r.request === null || names.has(r.request)).map((r) => r.run)
        .join(", ")}. ${list.map(([name, sha]) =>
          html`
            ${name} <code>${sha.slice(0, 16)}</code>;
          `
        )}${files.size > 6
        ? `and ${files.size - 6} more files; `
        : ""}whole hashes are in the ledger under these beginnings.</p>
  `;
}
