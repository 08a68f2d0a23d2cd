import type { DieReview, RequestReview, ReviewData, TraitReview, Verdict } from "../review_types.ts";
import { type Html, html } from "./html.ts";
import { percentText, shown } from "./numbers.ts";
import { figure } from "./plot.ts";
import { foldedTable, type PageTable } from "./table.ts";
import { decisionLegend, decisionMap, ramp, traitMap } from "./wafer_map.ts";

type Shown = DieReview & { readonly verdict: Verdict | "none"; readonly hover: string };

function verdictsOf(data: ReviewData, request: RequestReview): Shown[] {
  const ranked = new Map(request.ranked.map((d) => [d.die, d]));
  return data.dies.map((d) => {
    const r = ranked.get(d.die);
    const verdict = d.unavailable !== null ? "none" : r?.decision ?? "none";
    const why = d.unavailable ??
      (r === undefined
        ? "not predicted"
        : `${r.decision}, probability ${shown(r.probability)}${
          r.decision === "accept" || r.limited_by === null ? "" : `, limited by ${r.limited_by}`
        }, best guide ${r.guide}`);
    return { ...d, verdict, hover: `${d.die}: ${why}` };
  });
}

export function mapsSection(data: ReviewData): Html {
  const diameter = new Map(data.wafers.map((w) => [w.wafer, w.diameter_mm]));
  const decisions = data.requests.map((request) => {
    const dies = verdictsOf(data, request);
    const maps = data.wafers.map(({ wafer }) =>
      figure(
        wafer,
        decisionMap(
          `Decisions for ${request.request} on wafer ${wafer}`,
          dies.filter((d) => d.wafer === wafer),
          diameter.get(wafer) ?? null,
        ),
      )
    );
    const table: PageTable = {
      caption: `Decisions for ${request.request} by die`,
      file: `decisions-${data.lot}-${request.request}`,
      columns: ["die", "x_mm", "y_mm", "decision", "probability", "limited_by", "guide", "unavailable"].map((
        title,
      ) => ({ title })),
      rows: dies.map((d) => {
        const r = request.ranked.find((x) => x.die === d.die);
        return [
          d.die,
          d.x_mm,
          d.y_mm,
          d.verdict === "none" ? null : d.verdict,
          r?.probability ?? null,
          r?.limited_by ?? null,
          r?.guide ?? null,
          d.unavailable,
        ];
      }),
    };
    return html`<div><h3>Decision for ${request.request}</h3><div class="maps">${maps}</div>${
      foldedTable(table)
    }</div>`;
  });
  return html`
    <p
      class="soft">Seen from the guide side, x to the right, y up, notch at −y. Pointing at a die gives its numbers.</p><div
      class="blocks">${decisions}</div><p>${decisionLegend()}</p>${[...data.traits].filter((t) =>
        t.dies.length > 0
      ).sort((a, b) => Number(isOpen(b)) - Number(isOpen(a)))
        .map((t) => traitSection(data, t, diameter))}
  `;
}

function traitSection(
  data: ReviewData,
  trait: TraitReview,
  diameter: ReadonlyMap<string, number | null>,
): Html {
  const values = trait.dies.map((d) => d.value);
  const [low, high] = values.reduce(([a, b], v) => [Math.min(a, v), Math.max(b, v)], [Infinity, -Infinity]);
  const domain: [number, number] = low === high
    ? [low - Math.abs(low || 1) * 0.01, high + Math.abs(high || 1) * 0.01]
    : [low, high];
  const read = new Set(trait.dies.map((d) => d.wafer));
  const maps = data.wafers.filter((w) => read.has(w.wafer)).map(({ wafer }) =>
    figure(
      wafer,
      traitMap(
        `${trait.words} on wafer ${wafer}`,
        trait,
        data.dies.filter((d) => d.wafer === wafer),
        diameter.get(wafer) ?? null,
        domain,
      ),
    )
  );
  const place = new Map(data.dies.map((d) => [d.die, d]));
  const table: PageTable = {
    caption: `${trait.words} by die${trait.unit === "" ? "" : `, ${trait.unit}`}`,
    file: `${trait.key.replaceAll(/[^A-Za-z0-9]+/g, "-").replace(/-+$/, "")}-${data.lot}`,
    columns: ["die", "x_mm", "y_mm", "value", "u", "readings"].map((title) => ({ title })),
    rows: trait.dies.map((
      d,
    ) => [d.die, place.get(d.die)?.x_mm ?? null, place.get(d.die)?.y_mm ?? null, d.value, d.u, d.rows]),
  };
  const shares = trait.shares.length === 0
    ? null
    : html`<li>Shares of the variance: ${
      trait.shares.map((s) =>
        `${percentText(s.share)} ${s.level === "readings" ? "in the readings" : s.level}`
      ).join(", ")
    }.</li>`;
  // Traits are many: one picture each would hide the few that matter, so all but the usual ones are folded.
  return html`
    <details class="trait" ${isOpen(trait)
      ? html`
        open
      `
      : null}><summary>Map: ${trait.words} (${trait.dies.length} of ${data.dies.length} dies read)</summary>
    <div class="maps">${maps}</div><p>${ramp(domain, trait.unit)}</p>
    <ul>${trait.trends.map((t) => html`<li>${t.wafer}: ${t.sentence}.</li>`)}${shares}</ul>${foldedTable(
      table,
    )}</details>
  `;
}

/** Loss and duty cycle, if enough dies were read for a picture to say something. */
const isOpen = ({ key, dies }: TraitReview): boolean => /^(loss_db_cm|duty)\|/.test(key) && dies.length >= 6;
