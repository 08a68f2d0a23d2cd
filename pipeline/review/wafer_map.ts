import type { DieReview, TraitReview, Verdict } from "../review_types.ts";
import { type Html, html } from "./html.ts";
import { shown } from "./numbers.ts";
import { chart, Plot } from "./plot.ts";

/** What a map shows of a die. */
export interface MapCell {
  readonly die: string;
  readonly x: number;
  readonly y: number;
  readonly hover: string;
  /** In the die, if there is room. */
  readonly label: string;
}

const SIZE = 250;

/** Pitch of the dies in x and y, mm: the smallest distance between different coordinates; a lone row gets that of the other way. */
export function pitchOf(
  dies: readonly { readonly x_mm: number; readonly y_mm: number }[],
): { dx: number; dy: number } {
  const least = (values: readonly number[]) => {
    const sorted = [...new Set(values.map((v) => Number(v.toFixed(4))))].sort((a, b) => a - b);
    return sorted.slice(1).reduce((d, v, k) => Math.min(d, v - sorted[k]!), Infinity);
  };
  const [dx, dy] = [least(dies.map((d) => d.x_mm)), least(dies.map((d) => d.y_mm))];
  const finite = [dx, dy].filter(Number.isFinite);
  const any = finite.length === 0 ? 5 : Math.min(...finite);
  return { dx: Number.isFinite(dx) ? dx : any, dy: Number.isFinite(dy) ? dy : any };
}

interface Frame {
  readonly diameter: number;
  readonly dx: number;
  readonly dy: number;
  /** Room for a label in a die, px. */
  readonly room: number;
}

function frameOf(dies: readonly DieReview[], diameter_mm: number | null): Frame {
  const { dx, dy } = pitchOf(dies);
  const reach = dies.reduce(
    (r, d) => Math.max(r, Math.hypot(Math.abs(d.x_mm) + dx / 2, Math.abs(d.y_mm) + dy / 2)),
    0,
  );
  const diameter = Math.max(diameter_mm ?? 0, 2 * reach);
  return { diameter, dx, dy, room: Math.min(dx, 1.6 * dy) / diameter * SIZE };
}

/** Outline with the notch at −y, seen from the guide side. */
function outline({ diameter }: Frame): [number, number][] {
  const r = diameter / 2;
  const notch = 0.05; // rad to either side
  const points: [number, number][] = [];
  for (let k = 0; k <= 60; k++) {
    const angle = -Math.PI / 2 + notch + (2 * Math.PI - 2 * notch) * k / 60;
    points.push([r * Math.cos(angle), r * Math.sin(angle)]);
  }
  points.push([0, -0.94 * r], points[0]!);
  return points;
}

function mapChart(label: string, frame: Frame, color: Plot.ScaleOptions, marks: Plot.Markish[]): Html {
  const r = 0.52 * frame.diameter;
  return chart(label, {
    width: SIZE,
    height: SIZE,
    margin: 2,
    x: { domain: [-r, r], axis: null },
    y: { domain: [-r, r], axis: null },
    color,
    marks: [Plot.line(outline(frame), { stroke: "currentColor", strokeOpacity: 0.5 }), ...marks],
  });
}

const VERDICTS: readonly (Verdict | "none")[] = ["accept", "hold", "reject", "none"];
const LETTER: Readonly<Record<Verdict | "none", string>> = { accept: "A", hold: "H", reject: "R", none: "×" };

/** Decisions over one wafer: a colour and a letter each, so that neither is needed to tell them. */
export function decisionMap(
  label: string,
  dies: readonly (DieReview & { readonly verdict: Verdict | "none"; readonly hover: string })[],
  diameter_mm: number | null,
): Html {
  const frame = frameOf(dies, diameter_mm);
  const box = boxOf<typeof dies[number]>(frame);
  return mapChart(label, frame, {
    type: "categorical",
    domain: VERDICTS,
    range: VERDICTS.map((v) => `var(--${v})`),
  }, [
    Plot.rect(dies, { ...box, fill: "verdict", stroke: "var(--paper)", title: "hover" }),
    ...frame.room < 12 ? [] : [Plot.text(dies, {
      x: "x_mm",
      y: "y_mm",
      text: (d) => LETTER[d.verdict as Verdict],
      fill: (d) => `var(--on-${d.verdict})`,
      fontSize: 13,
      fontWeight: 700,
      pointerEvents: "none",
    })],
  ]);
}

const boxOf = <D extends DieReview>({ dx, dy }: Frame) => ({
  x1: (d: D) => d.x_mm - 0.47 * dx,
  x2: (d: D) => d.x_mm + 0.47 * dx,
  y1: (d: D) => d.y_mm - 0.47 * dy,
  y2: (d: D) => d.y_mm + 0.47 * dy,
});

/** A trait over one wafer; dies without a reading stay empty. `domain` is common to the wafers of a lot. */
export function traitMap(
  label: string,
  trait: TraitReview,
  dies: readonly DieReview[],
  diameter_mm: number | null,
  domain: readonly [number, number],
): Html {
  const frame = frameOf(dies, diameter_mm);
  const values = new Map(trait.dies.map((d) => [d.die, d]));
  const rows = dies.map((d) => {
    const read = values.get(d.die);
    return {
      ...d,
      value: read?.value ?? null,
      hover: read === undefined
        ? ""
        : `${d.die}: ${shown(read.value, 4)} ± ${shown(read.u, 2)}${
          trait.unit === "" ? "" : ` ${trait.unit}`
        }, ${read.rows} reading${read.rows === 1 ? "" : "s"}`,
    };
  });
  const [low, high] = domain;
  const dark = (v: number) => (v - low) / (high - low || 1) < 0.55;
  const box = boxOf<typeof rows[number]>(frame);
  const known = rows.filter((d) => d.value !== null);
  return mapChart(label, frame, { type: "linear", scheme: "cividis", domain: [low, high] }, [
    Plot.rect(rows.filter((d) => d.value === null), {
      ...box,
      fill: "none",
      stroke: "currentColor",
      strokeOpacity: 0.35,
    }),
    Plot.rect(known, { ...box, fill: "value", title: "hover" }),
    ...frame.room < 30 ? [] : [Plot.text(known, {
      x: "x_mm",
      y: "y_mm",
      text: (d) => shown(d.value, 3),
      fill: (d) => dark(d.value!) ? "#ffffff" : "#000000",
      fontSize: 11,
      pointerEvents: "none",
    })].map((mark) => mark),
  ]);
}

/** Colours of a trait map, from its lowest to its highest value. */
export function ramp(domain: readonly [number, number], unit: string): Html {
  const [low, high] = domain;
  const steps = Array.from({ length: 32 }, (_, k) => k / 32);
  const svg = chart(`colours from ${shown(low)} to ${shown(high)} ${unit}`, {
    width: 160,
    height: 14,
    margin: 1,
    x: { axis: null, domain: [0, 1] },
    color: { type: "linear", scheme: "cividis", domain: [0, 31 / 32] },
    marks: [
      Plot.rectX(steps, { x1: (t: number) => t, x2: (t: number) => t + 1 / 32, fill: (t: number) => t }),
    ],
  });
  return html`
    <span class="ramp">${shown(low)} ${svg} ${shown(high)} ${unit}</span> <span
      class="soft">Empty: not read.</span>
  `;
}

/** Meaning of the colours and letters of a decision map. */
export const decisionLegend = (): Html =>
  html`<span class="keys">${
    VERDICTS.map((v) =>
      html`
        <span class="key"><span class="tag ${v}">${LETTER[v]}</span> ${v === "none"
          ? "can't be shipped"
          : v}</span>
      `
    )
  }</span>`;
