import { deepEqual, equal, match, ok } from "node:assert/strict";
import { parseHTML } from "linkedom";
import { controlChart, limitChart, yieldChart } from "../../../pipeline/review/charts.ts";
import type { Html } from "../../../pipeline/review/html.ts";
import { decisionMap, pitchOf, traitMap } from "../../../pipeline/review/wafer_map.ts";
import type { ChartReview, DieReview, TraitReview } from "../../../pipeline/review_types.ts";
import { assertClose } from "../../assert_close.ts";

interface Node {
  readonly textContent: string;
  getAttribute(name: string): string | null;
  querySelector(selector: string): Node | null;
  querySelectorAll(selector: string): Iterable<Node>;
}
const svgOf = ({ text }: Html): Node =>
  (parseHTML(`<body>${text}</body>`) as unknown as { document: Node }).document;
const number = (node: Node, name: string) => Number(node.getAttribute(name));

const CHART: ChartReview = {
  key: "loss_db_cm|1550|TM|",
  words: "loss at 1550 nm TM",
  unit: "dB/cm",
  centre: 0.2,
  lower: 0.1,
  upper: 0.3,
  points: [0.21, 0.18, 0.2, 0.24, 0.45].map((value, k) => ({
    lot: `K0${k}`,
    value,
    z: (value - 0.2) / 0.0333,
  })),
  signals: ["one point beyond 3 standard deviations"],
};

Deno.test("a control chart holds each value at its height, the limits, and a diamond where it signals", () => {
  const svg = svgOf(controlChart(CHART));
  const picture = svg.querySelector("svg")!;
  equal(picture.getAttribute("role"), "img");
  equal(picture.getAttribute("aria-label"), "Control chart of loss at 1550 nm TM");
  const titled = (text: string) =>
    [...svg.querySelectorAll("title")].filter((t) => t.textContent.startsWith(text));
  for (const { lot, value } of CHART.points) equal(titled(`${lot}: ${value} dB/cm`).length, 1, lot);
  for (const limit of ["upper limit: 0.3 ", "centre: 0.2 ", "lower limit: 0.1 "]) {
    equal(titled(limit).length, 1, limit);
  }
  const circles = [...svg.querySelectorAll("circle")];
  equal(circles.length, 4, "the point that signals is no circle");
  // Heights are linear in the value: two points fix the line, the others lie on it (to a tenth of a pixel).
  const [a, b] = [circles[0]!, circles[3]!];
  const slope = (number(b, "cy") - number(a, "cy")) / (0.24 - 0.21);
  ok(slope < 0, "upwards is more");
  circles.forEach((c, k) => {
    assertClose(number(c, "cy"), number(a, "cy") + slope * (CHART.points[k]!.value - 0.21), { abs: 0.6 });
  });
});

Deno.test("a yield chart holds counts and intervals", () => {
  const svg = svgOf(
    yieldChart("Yield", [{ name: "K01-1", good: 3, of: 10, low: 0.067, high: 0.652 }, {
      name: "none",
      good: 0,
      of: 0,
      low: 0,
      high: 1,
    }]),
  );
  const titles = [...svg.querySelectorAll("title")].map((t) => t.textContent);
  ok(titles.includes("K01-1: 3 of 10, 30 %, interval 6.7 % to 65.2 %"), titles.join("; "));
  ok(!titles.some((t) => t.startsWith("none")), "no yield of no die");
});

Deno.test("bars of limits are as long as their counts", () => {
  const svg = svgOf(limitChart("Limits", [
    { figure: "purity", rejected: 8, on_hold: 2, would_pass: 1, wafers: ["a"] },
    { figure: "car", rejected: 4, on_hold: 0, would_pass: 0, wafers: ["a"] },
  ]));
  const bars = new Map(
    [...svg.querySelectorAll("rect")].map((r) => [r.querySelector("title")?.textContent, number(r, "width")]),
  );
  const unit = bars.get("car: 4 rejected")! / 4;
  assertClose(bars.get("purity: 8 rejected")!, 8 * unit, { abs: 1.1 });
  assertClose(bars.get("purity: 2 on hold")!, 2 * unit, { abs: 1.1 });
});

const DIES: DieReview[] = [[-5, 5], [5, 5], [-5, -5], [5, -5]].map(([x_mm, y_mm], k) => ({
  die: `K01-1/0${k + 1}`,
  wafer: "K01-1",
  x_mm: x_mm!,
  y_mm: y_mm!,
  unavailable: null,
}));

Deno.test("a wafer map stands as the wafer does: x to the right, y up", () => {
  const verdicts = ["accept", "hold", "reject", "none"] as const;
  const svg = svgOf(
    decisionMap("map", DIES.map((d, k) => ({ ...d, verdict: verdicts[k]!, hover: d.die })), 50.8),
  );
  const at = new Map(
    [...svg.querySelectorAll("rect")].map((r) => [r.querySelector("title")!.textContent, r]),
  );
  const [first, right, below] = ["K01-1/01", "K01-1/02", "K01-1/03"].map((d) => at.get(d)!);
  ok(number(right!, "x") > number(first!, "x") && number(right!, "y") === number(first!, "y"));
  ok(number(below!, "y") > number(first!, "y"), "in a picture down is more");
  deepEqual(
    [...svg.querySelectorAll("rect")].map((r) => r.getAttribute("fill")),
    verdicts.map((v) => `var(--${v})`),
  );
  match([...svg.querySelectorAll("text")].map((t) => t.textContent).join(""), /AHR×/);
  deepEqual(pitchOf(DIES), { dx: 10, dy: 10 });
  deepEqual(pitchOf(DIES.slice(0, 2)), { dx: 10, dy: 10 }, "one row: as far apart as the columns");
});

Deno.test("a trait map shows every digit that it has room for, and leaves unread dies empty", () => {
  const trait: TraitReview = {
    key: "duty|||",
    words: "duty cycle",
    unit: "",
    dies: [{ die: "K01-1/01", wafer: "K01-1", value: 0.48763, u: 0.0041, rows: 3 }, {
      die: "K01-1/04",
      wafer: "K01-1",
      value: 0.6,
      u: 0.01,
      rows: 1,
    }],
    trends: [],
    shares: [],
  };
  const svg = svgOf(traitMap("map", trait, DIES, 30, [0.48763, 0.6]));
  const titles = [...svg.querySelectorAll("title")].map((t) => t.textContent.trim());
  deepEqual(titles, ["K01-1/01: 0.4876 ± 0.0041, 3 readings", "K01-1/04: 0.6 ± 0.01, 1 reading"]);
  deepEqual([...svg.querySelectorAll("text")].map((t) => t.textContent), ["0.488", "0.6"]);
  equal([...svg.querySelectorAll("rect")].length, 4);
});
