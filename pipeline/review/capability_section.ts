import type { CapabilityReview } from "../review_types.ts";
import { type Html, html } from "./html.ts";
import { percentText, shown } from "./numbers.ts";
import { chart, figure, Plot } from "./plot.ts";
import { csvLink, foldedTable, type PageTable, tableOf } from "./table.ts";

const WIDTH = 560;

/** cpk of traits with limits, with intervals. */
export function capabilityChart(rows: readonly CapabilityReview[]): Html {
  const data = rows.filter((r) => r.cpk !== null).map((r) => ({
    name: nameOf(r),
    // What is far beyond three needs no scale of its own.
    value: Math.min(4, Math.max(-1, r.cpk!.value)),
    lo: Math.min(4, Math.max(-1, r.cpk!.lo)),
    hi: Math.min(4, Math.max(-1, r.cpk!.hi)),
    low: r.cpk!.hi < 1,
    hover: `${nameOf(r)}: cpk ${shown(r.cpk!.value)}, ${shown(r.cpk!.lo)} to ${shown(r.cpk!.hi)}`,
  }));
  const at = { y: "name", title: "hover" } as const;
  return chart("Capability of traits with limits", {
    width: WIDTH,
    height: 44 + 24 * data.length,
    marginLeft: 230,
    marginRight: 20,
    marginBottom: 36,
    x: { label: "cpk, with its 95 % interval (cut at −1 and 4)", domain: [-1, 4], grid: true },
    y: { domain: data.map((d) => d.name), label: null },
    marks: [
      Plot.ruleX([1], { stroke: "currentColor", strokeDasharray: "4 3" }),
      Plot.ruleY(data, { ...at, x1: "lo", x2: "hi", strokeWidth: 3, stroke: "var(--mark)" }),
      Plot.dot(data.filter((d) => !d.low), { ...at, x: "value", r: 5, fill: "var(--mark)" }),
      Plot.dot(data.filter((d) => d.low), {
        ...at,
        x: "value",
        r: 7,
        fill: "var(--alarm)",
        symbol: "diamond",
      }),
    ],
  });
}

const nameOf = (r: CapabilityReview): string => `${r.wafer ?? "lot"}: ${r.words}`;

export function capabilitySection(all: readonly CapabilityReview[]): Html {
  if (all.length === 0) return html``;
  const known = all.filter((r) => r.cpk !== null);
  const low = known.filter((r) => r.cpk!.hi < 1);
  const table: PageTable = {
    caption: "Capability of traits with limits",
    file: "capability",
    columns: [
      "unit",
      "trait",
      "limits",
      "dies",
      "independent",
      "mean",
      "sd",
      "cp",
      "cp low",
      "cp high",
      "cpk",
      "cpk low",
      "cpk high",
      "cpk at least",
      "beyond, of normal dies",
      "why none",
    ].map((title) => ({ title })),
    rows: all.map((r) => [
      r.wafer ?? "lot",
      r.words,
      r.limits,
      r.dies,
      r.effective_dies,
      r.mean,
      r.sd,
      r.cp?.value ?? null,
      r.cp?.lo ?? null,
      r.cp?.hi ?? null,
      r.cpk?.value ?? null,
      r.cpk?.lo ?? null,
      r.cpk?.hi ?? null,
      r.cpk_at_least,
      r.outside,
      r.refused,
    ]),
  };
  const told = low.length === 0
    ? known.length === 0
      ? "No trait has ten dies read on a wafer: no capability can be told."
      : "No trait demonstrably keeps its limits worse than a cpk of 1."
    : `Worse than a cpk of 1: ${
      low.map((r) =>
        `${nameOf(r)} ${shown(r.cpk!.value, 2)} (${percentText(r.outside)} of normal dies beyond)`
      ).join(
        "; ",
      )
    }.`;
  return html`<p>${told}</p>${
    known.length === 0 ? html`${tableOf(table)}${csvLink(table)}` : figure(
      "Distance of the mean from the nearer limit over three standard deviations of dies, as read. Limits are those of the trait rules; dies of several wafers count as as many as say the same independently.",
      capabilityChart(known),
      foldedTable(table),
    )
  }`;
}
