import type { GainReview, RequestReview, ReviewData } from "../review_types.ts";
import { type Html, html } from "./html.ts";
import { percentText, shown } from "./numbers.ts";
import { chart, figure, Plot } from "./plot.ts";
import { csvLink, foldedTable, type PageTable, tableOf } from "./table.ts";

/** Rise of the yield with one group of traits at target, and with all: bars of dies. */
export function gainChart(label: string, gain: GainReview): Html {
  const bars = [
    ...gain.groups.map((g) => ({ name: g.words, dies: g.dies, share: g.share, all: false })),
    { name: "all together", dies: gain.all_at_target - gain.as_made, share: null, all: true },
  ];
  return chart(label, {
    width: 560,
    height: 44 + 28 * bars.length,
    marginLeft: 130,
    marginRight: 40,
    marginBottom: 36,
    x: {
      label: "dies accepted more than as made",
      grid: true,
      domain: [Math.min(0, ...bars.map((b) => b.dies)), Math.max(1, ...bars.map((b) => b.dies))],
      tickFormat: (v: number) => Number.isInteger(v) ? String(v) : "",
    },
    y: { domain: bars.map((b) => b.name), label: null },
    marks: [
      Plot.barX(bars, {
        x: "dies",
        y: "name",
        fill: (b) => b.all ? "var(--none)" : "var(--mark)",
        title: (b) =>
          `${b.name}: ${b.dies} of ${gain.dies} dies more${
            b.share === null ? "" : `, ${percentText(b.share)} of the whole rise`
          }`,
      }),
      Plot.text(bars, {
        x: "dies",
        y: "name",
        text: (b) => String(b.dies),
        dx: 6,
        textAnchor: "start",
      }),
      Plot.ruleX([0]),
    ],
  });
}

function gainTable(data: ReviewData, r: RequestReview): PageTable {
  return {
    caption: `Yield for ${r.request} with traits at their targets`,
    file: `restored-${data.lot}-${r.request}`,
    columns: [
      "unit",
      "at target",
      "accepted",
      "dies",
      "yield",
      "rise",
      "share of the whole rise",
      "rise of expected dies",
    ].map((title) => ({ title })),
    rows: r.gains.flatMap((g) => [
      [g.id, "as made", g.as_made, g.dies, g.as_made / g.dies, null, null, null],
      ...g.groups.map((
        x,
      ) => [g.id, x.words, g.as_made + x.dies, g.dies, x.yield, x.rise, x.share, x.expected]),
      [
        g.id,
        "all",
        g.all_at_target,
        g.dies,
        g.all_at_target / g.dies,
        (g.all_at_target - g.as_made) / g.dies,
        g.all_at_target === g.as_made ? null : 1,
        g.expected_all,
      ],
      [g.id, "interaction", null, g.dies, null, g.interaction, g.interaction_share, null],
    ]),
  };
}

function limitsByWafer(data: ReviewData, r: RequestReview): PageTable {
  return {
    caption: `What limits dies for ${r.request}, by wafer, and how many would pass if that alone were met`,
    file: `limits-by-wafer-${data.lot}-${r.request}`,
    columns: ["wafer", "requirement", "rejected", "on hold", "would pass"].map((title) => ({ title })),
    rows: r.limits_by_wafer.flatMap((w) =>
      w.limits.map((l) => [w.wafer, l.figure, l.rejected, l.on_hold, l.would_pass])
    ),
  };
}

/** What each trait at its target would bring, what limits each wafer, and what dies on hold lack. */
export function gainsSection(data: ReviewData): Html {
  const parts = data.requests.map((r) => {
    const lot = r.gains[0];
    const wafers = limitsByWafer(data, r);
    const missing: PageTable = {
      caption: `Readings that dies on hold for ${r.request} lack most`,
      file: `next-readings-${data.lot}-${r.request}`,
      columns: ["reading", "dies", "expected to be decided", "which"].map((title) => ({ title })),
      rows: r.missing_readings.map((m) => [m.words, m.dies.length, m.decided, m.dies.join(", ")]),
    };
    if (lot === undefined && wafers.rows.length === 0) return null;
    return html`
      <h3>${r.request}</h3>
      <div class="pair">${lot === undefined
        ? html`<p>The prediction in force holds no calculation with traits at target.</p>`
        : figure(
          `Dies accepted more than the ${lot.as_made} of ${lot.dies} as made, with one group of traits at its target in the model and everything else as made; ${
            interactionWords(lot)
          }.`,
          gainChart(`What traits at target would bring for ${r.request}`, lot),
          foldedTable(gainTable(data, r)),
        )}<div>${wafers.rows.length === 0
        ? html`<p>No wafer has a die that is limited.</p>`
        : html`${tableOf(wafers)}${csvLink(wafers)}`}</div></div>
      ${missing.rows.length === 0 ? null : html`${tableOf(missing)}${csvLink(missing)}`}
    `;
  }).filter((p) => p !== null);
  return html`${parts}`;
}

/** How single rises and the whole one go together. */
export function interactionWords(
  { interaction, interaction_share, dies, all_at_target, as_made }: GainReview,
): string {
  const count = interaction * dies;
  if (all_at_target === as_made && Math.abs(count) < 0.5) return "no die more with all of them at target";
  if (Math.abs(count) < 0.5) return "the single rises add up to that of all together";
  const share = interaction_share === null
    ? ""
    : ` (interaction ${percentText(interaction_share)} of the whole rise)`;
  return count > 0
    ? `${shown(count)} of the dies need several put right together${share}`
    : `the single rises overlap by ${shown(-count)} ${
      Math.round(-count) === 1 ? "die" : "dies"
    }, for which either of several would do${share}`;
}
