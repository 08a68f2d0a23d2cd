import type { WaferChartReview } from "../review_types.ts";
import { type Html, html } from "./html.ts";
import { capitalised, shown } from "./numbers.ts";
import { chart, figure, Plot } from "./plot.ts";
import { foldedTable, type PageTable } from "./table.ts";

const WIDTH = 560;

type Point = WaferChartReview["points"][number] & { readonly own: boolean; readonly out: boolean };

const pointsOf = (c: WaferChartReview, lot: string): Point[] =>
  c.points.map((p) => ({ ...p, own: p.lot === lot, out: p.z !== null && Math.abs(p.z) > 3 }));

/** Names that have room; of many wafers the first of each lot is named. */
function ticksOf(points: readonly Point[]): { ticks: string[]; tickRotate: number } {
  const all = points.map((p) => p.wafer);
  const first = points.filter((p, k) => points[k - 1]?.lot !== p.lot).map((p) => p.wafer);
  const some = all.length <= 12 ? all : first;
  const every = Math.ceil(some.length / 16);
  return { ticks: some.filter((_, k) => k % every === 0), tickRotate: some.length > 5 ? -60 : 0 };
}

/** Means of wafers with the limits that they are judged by, and those of their dies' scatter alone. */
export function meanChart(c: WaferChartReview, lot: string): Html {
  const points = pointsOf(c, lot);
  const limits = [
    ...(c.limits === null ? [] : [["upper limit", c.limits.upper], ["lower limit", c.limits.lower]] as const),
    ["centre", c.centre],
  ] as (readonly [string, number])[];
  const hover = (p: Point) =>
    `${p.wafer}: ${shown(p.mean, 4)} ${c.unit}, ${p.dies} ${p.dies === 1 ? "die" : "dies"}${
      p.z === null ? "" : `, ${shown(p.z, 2)} standard deviations from the centre`
    }`;
  return chart(`Wafer means of ${c.words}`, {
    width: WIDTH,
    height: 240,
    marginTop: 30,
    marginLeft: 64,
    marginRight: 84,
    marginBottom: 60,
    x: { type: "point", domain: points.map((p) => p.wafer), label: null, ...ticksOf(points) },
    y: {
      label: c.unit === "" ? "share" : c.unit,
      nice: true,
      zero: false,
      tickFormat: (v: number) => shown(v, 5),
    },
    marks: [
      Plot.ruleX(points, {
        x: "wafer",
        y1: "within_lower",
        y2: "within_upper",
        stroke: "currentColor",
        strokeOpacity: 0.25,
        strokeWidth: 5,
      }),
      Plot.ruleY(limits, {
        y: (d) => d[1],
        stroke: "currentColor",
        strokeDasharray: "4 3",
        strokeOpacity: 0.7,
        title: (d) => `${d[0]}: ${shown(d[1], 4)} ${c.unit}`,
      }),
      Plot.text(limits, {
        x: () => points.at(-1)!.wafer,
        y: (d) => d[1],
        text: (d) => d[0],
        dx: 12,
        textAnchor: "start",
        fontSize: 11,
      }),
      ...marksOf(points, "mean", hover),
    ],
  });
}

/** Standard deviations between dies of every wafer, with their limits. */
export function spreadChart(c: WaferChartReview, lot: string): Html {
  const points = pointsOf(c, lot).filter((p) => p.s !== null).map((p) => ({ ...p, out: p.s! > p.s_upper! }));
  const hover = (p: Point) =>
    `${p.wafer}: standard deviation ${shown(p.s, 3)} ${c.unit}, limits ${shown(p.s_lower, 3)} to ${
      shown(p.s_upper, 3)
    }`;
  const line = { x: "wafer", stroke: "currentColor", strokeOpacity: 0.7, strokeDasharray: "4 3" } as const;
  return chart(`Spread of dies within wafers: ${c.words}`, {
    width: WIDTH,
    height: 180,
    marginTop: 30,
    marginLeft: 64,
    marginRight: 84,
    marginBottom: 60,
    x: { type: "point", domain: points.map((p) => p.wafer), label: null, ...ticksOf(points) },
    y: {
      label: `standard deviation${c.unit === "" ? "" : `, ${c.unit}`}`,
      nice: true,
      zero: true,
      ticks: 4,
      tickFormat: (v: number) => shown(v, 5),
    },
    marks: [
      Plot.line(points, { ...line, y: "s_upper" }),
      Plot.line(points, { ...line, y: "s_centre" }),
      ...marksOf(points, "s", hover),
    ],
  });
}

/** This lot's wafers filled, earlier ones open, those beyond as diamonds. */
function marksOf(points: readonly Point[], y: "mean" | "s", title: (p: Point) => string) {
  const at = { x: "wafer", y, title } as const;
  return [
    Plot.dot(points.filter((p) => !p.own && !p.out), {
      ...at,
      r: 3.5,
      stroke: "var(--mark)",
      fill: "var(--paper)",
    }),
    Plot.dot(points.filter((p) => p.own && !p.out), { ...at, r: 4.5, fill: "var(--mark)" }),
    Plot.dot(points.filter((p) => p.out), { ...at, r: 7, fill: "var(--alarm)", symbol: "diamond" }),
  ];
}

function waferTable(c: WaferChartReview): PageTable {
  return {
    caption: `${c.words} by wafer over lots`,
    file: `wafer-chart-${c.key.replaceAll(/[^A-Za-z0-9]+/g, "-").replace(/-+$/, "")}`,
    columns: ["wafer", "lot", "dies", "mean", "z", "x-bar lower", "x-bar upper", "s", "s lower", "s upper"]
      .map((
        title,
      ) => ({ title })),
    rows: c.points.map((p) => [
      p.wafer,
      p.lot,
      p.dies,
      p.mean,
      p.z,
      p.within_lower,
      p.within_upper,
      p.s,
      p.s_lower,
      p.s_upper,
    ]),
  };
}

/** Charts of wafer means with those of their spreads; those with a wafer out first and open, the rest folded. */
export function waferChartsPart(charts: readonly WaferChartReview[], lot: string): Html | null {
  if (charts.length === 0) return null;
  const isOut = (c: WaferChartReview) => c.points.some((p) => p.z !== null && Math.abs(p.z) > 3);
  const one = (c: WaferChartReview) =>
    html`
      <details class="trait" ${isOut(c)
        ? html`
          open
        `
        : null}><summary>Wafers: ${c.words}${isOut(c) ? ", out of line" : ""}</summary>${figure(
          `${capitalised(c.words)}${c.unit === "" ? "" : `, ${c.unit}`}. ${c.sentence}.`,
          [meanChart(c, lot), spreadChart(c, lot)],
          foldedTable(waferTable(c)),
        )}</details>
    `;
  return html`
    <h3>Wafers over the lots</h3>
    <p
      class="soft">Means of wafers (X-bar) and standard deviations between their dies (s). Filled: this lot; open: lots before; diamonds: beyond. Thick grey bars: what the scatter of dies alone would allow a wafer's mean. Dashed: what wafers of good lots keep, which differ by more; those limits judge. Growth of a spread is judged by its own rule, corrected for everything compared.</p>${[
        ...charts,
      ].sort((a, b) => Number(isOut(b)) - Number(isOut(a))).map(one)}
  `;
}
