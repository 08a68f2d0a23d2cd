import { budgetBasis } from "../budget_basis.ts";
import type {
  BudgetRow,
  ChartReview,
  ExpectedDies,
  LimitRow,
  LotYieldRow,
  RequestReview,
  ShareOf,
} from "../review_types.ts";
import { BASES } from "../../shared/vocabulary.ts";
import type { Html } from "./html.ts";
import { percentText, shown } from "./numbers.ts";
import { chart, Plot } from "./plot.ts";

const WIDTH = 560;

/** What a yield chart shows of a wafer, group or lot. */
export interface YieldBar extends Pick<ShareOf, "good" | "of" | "low" | "high"> {
  readonly name: string;
  /** Good dies expected from the probabilities. */
  readonly expected?: ExpectedDies | null;
}

/** Yields of wafers, groups or lots, each with its exact interval, and below it what the probabilities let one expect. */
export function yieldChart(label: string, rows: readonly YieldBar[]): Html {
  const data = rows.filter((r) => r.of > 0).map((r) => ({
    ...r,
    value: 100 * r.good / r.of,
    from: 100 * r.low,
    to: 100 * r.high,
    hover: `${r.name}: ${r.good} of ${r.of}, ${percentText(r.good / r.of)}, interval ${
      percentText(r.low)
    } to ${percentText(r.high)}`,
  }));
  const expected = data.flatMap(({ name, of, expected: e }) =>
    e === null || e === undefined ? [] : [{
      name,
      value: 100 * e.dies / of,
      from: 100 * e.together_low / of,
      to: 100 * e.together_high / of,
      hover: `${name}: ${shown(e.dies)} of ${of} expected, ${shown(e.low)} to ${
        shown(e.high)
      } if dies are independent, ${shown(e.together_low)} to ${
        shown(e.together_high)
      } if a wafer's dies share their doubts`,
    }]
  );
  const below = { dy: 8, title: "hover", stroke: "currentColor" } as const;
  return chart(label, {
    width: WIDTH,
    height: 44 + (expected.length > 0 ? 36 : 24) * data.length,
    marginLeft: 130,
    marginRight: 20,
    marginBottom: 36,
    x: { domain: [0, 100], label: "dies accepted, %", grid: true },
    y: { domain: data.map((d) => d.name), label: null },
    marks: [
      Plot.ruleY(data, {
        y: "name",
        x1: "from",
        x2: "to",
        strokeWidth: 3,
        stroke: "var(--mark)",
        title: "hover",
      }),
      Plot.dot(data, { y: "name", x: "value", r: 5, fill: "var(--mark)", title: "hover" }),
      Plot.ruleY(expected, { y: "name", x1: "from", x2: "to", ...below }),
      Plot.dot(expected, { y: "name", x: "value", r: 4, fill: "var(--paper)", ...below }),
    ],
  });
}

export const lotRows = (lots: readonly LotYieldRow[], request: string) =>
  lots.filter((l) => l.request === request).map((l) => ({ ...l, name: l.lot }));

/** A control chart: values over lots, centre and limits; points that signal are diamonds. */
export function controlChart(c: ChartReview): Html {
  const last = c.points.length - 1;
  const data = c.points.map((p, k) => ({
    ...p,
    out: p.value > c.upper || p.value < c.lower || (k === last && c.signals.length > 0),
    hover: `${p.lot}: ${shown(p.value, 4)} ${c.unit}, ${shown(p.z, 2)} standard deviations from the centre`,
  }));
  const limits = [["upper limit", c.upper], ["centre", c.centre], ["lower limit", c.lower]] as const;
  return chart(`Control chart of ${c.words}`, {
    width: WIDTH,
    height: 240,
    marginTop: 30,
    marginLeft: 64,
    marginRight: 84,
    marginBottom: 60,
    x: { type: "point", domain: data.map((d) => d.lot), label: null, tickRotate: data.length > 12 ? -60 : 0 },
    y: {
      label: c.unit === "" ? "share" : c.unit,
      nice: true,
      zero: false,
      tickFormat: (v: number) => shown(v, 5),
    },
    marks: [
      Plot.ruleY(limits, {
        y: (d) => d[1],
        stroke: "currentColor",
        strokeDasharray: "4 3",
        strokeOpacity: 0.7,
        title: (d) => `${d[0]}: ${shown(d[1], 4)} ${c.unit}`,
      }),
      Plot.text(limits, {
        x: () => data.at(-1)!.lot,
        y: (d) => d[1],
        text: (d) => d[0],
        dx: 12,
        textAnchor: "start",
        fontSize: 11,
      }),
      Plot.line(data, { x: "lot", y: "value", stroke: "var(--mark)", strokeWidth: 1.5 }),
      Plot.dot(data.filter((d) => !d.out), {
        x: "lot",
        y: "value",
        fill: "var(--mark)",
        r: 4,
        title: "hover",
      }),
      Plot.dot(data.filter((d) => d.out), {
        x: "lot",
        y: "value",
        fill: "var(--alarm)",
        symbol: "diamond",
        r: 7,
        title: "hover",
      }),
    ],
  });
}

/** Dies lost to each requirement. */
export function limitChart(label: string, limits: readonly LimitRow[]): Html {
  const bars = limits.flatMap((l) => [
    { figure: l.figure, dies: l.rejected, what: "rejected" },
    { figure: l.figure, dies: l.on_hold, what: "on hold" },
  ]).filter((b) => b.dies > 0);
  return chart(label, {
    width: WIDTH,
    height: 44 + 30 * limits.length,
    marginLeft: 190,
    marginRight: 20,
    marginBottom: 36,
    x: { label: "dies limited", grid: true, interval: 1 },
    y: { domain: limits.map((l) => l.figure), label: null },
    color: { type: "categorical", domain: ["rejected", "on hold"], range: ["var(--reject)", "var(--hold)"] },
    marks: [
      Plot.barX(bars, {
        x: "dies",
        y: "figure",
        fill: "what",
        order: ["rejected", "on hold"],
        title: (b) => `${b.figure}: ${b.dies} ${b.what}`,
      }),
      Plot.ruleX([0]),
    ],
  });
}

/** Factors of one arm of the heralding budget, each with twice its u. */
export function budgetChart(label: string, rows: readonly BudgetRow[]): Html {
  const data = rows.flatMap((r) =>
    (["signal", "idler"] as const).map((arm) => ({
      factor: r.factor,
      arm,
      mean: r[arm].mean,
      low: (r[arm].mean ?? NaN) - 2 * (r[arm].u ?? 0),
      high: Math.min(1, (r[arm].mean ?? NaN) + 2 * (r[arm].u ?? 0)),
      hover: `${r.factor}, ${arm}: ${shown(r[arm].mean)} (u ${shown(r[arm].u, 2)}), ${
        budgetBasis(r.factor, r[arm])
      }`,
    }))
  ).filter((d) => d.mean !== null);
  return chart(label, {
    width: WIDTH,
    height: 60 + 44 * rows.length,
    marginLeft: 90,
    marginRight: 20,
    marginBottom: 36,
    x: { domain: [0, 1], label: "share of the light that passes", grid: true },
    fy: { domain: rows.map((r) => r.factor), label: null },
    y: { axis: null, domain: ["signal", "idler"], padding: 0.4 },
    symbol: { domain: ["signal", "idler"], range: ["circle", "square"] },
    marks: [
      Plot.ruleY(data, {
        fy: "factor",
        y: "arm",
        x1: "low",
        x2: "high",
        strokeWidth: 3,
        stroke: "var(--mark)",
        title: "hover",
      }),
      Plot.dot(data, {
        fy: "factor",
        y: "arm",
        x: "mean",
        symbol: "arm",
        fill: "var(--mark)",
        r: 5,
        title: "hover",
      }),
    ],
  });
}

/** What the guides' numbers rest on, role by role. */
export function basisChart(label: string, rows: RequestReview["rests_on"]): Html {
  const names = [...new Set(rows.map((r) => nameOf(r)))];
  const data = rows.map((r) => ({
    ...r,
    name: nameOf(r),
    hover: `${nameOf(r)}: ${r.guides} guides, ${r.basis}`,
  }));
  return chart(label, {
    width: WIDTH,
    height: 50 + 24 * names.length,
    marginLeft: 290,
    marginRight: 20,
    marginBottom: 36,
    x: { label: "guides", grid: true },
    y: { domain: names, label: null },
    color: { type: "categorical", domain: BASES, range: BASES.map((b) => `var(--basis-${b})`) },
    marks: [
      Plot.barX(data, { x: "guides", y: "name", fill: "basis", order: [...BASES], title: "hover" }),
      Plot.ruleX([0]),
    ],
  });
}

const nameOf = (r: { readonly role: string; readonly trait: string }): string => `${r.role}: ${r.trait}`;
