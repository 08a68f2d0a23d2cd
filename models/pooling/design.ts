// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";
import type { EffectPrior } from "./fixed_effects.ts";
import type { Leaf } from "./forest.ts";

/** Centre of a die from the centre of its wafer, any one unit of length. */
export interface Place {
  readonly x: number;
  readonly y: number;
}

/** A smooth trend over the wafer: which shapes, and whether all lots share it or only the lot in question has it. */
export interface TrendShape {
  readonly radial: boolean;
  readonly linear: boolean;
  readonly lots: "all" | "own";
}

/** Names of the fixed effects, the row that a unit has in them, and their priors. */
export interface Design {
  readonly names: readonly string[];
  rowOf(unit: Pick<Leaf, "lot" | "die" | "widthUm">): number[];
  readonly prior: EffectPrior;
  /** Variance that a width adds which nobody has read; 0 for a width with readings. */
  newWidthVariance(widthUm: number | undefined): number;
}

/** More design widths than this are not told apart one by one: a straight line over the width stands for them. */
export const MOST_WIDTHS = 8;

export interface DesignQuestion {
  readonly leaves: readonly Leaf[];
  /** The mean over everything; u = Infinity when nobody states it. */
  readonly mean: Uncertain;
  /** Prior standard deviation of the difference that a design width makes. */
  readonly widthSd: number;
  readonly trend: TrendShape | null;
  /** Prior standard deviation of the trend's contribution at the edge of the wafer. */
  readonly trendSd: number;
  /** Places of dies by full id. */
  readonly places: ReadonlyMap<string, Place>;
  readonly lot: string;
}

/**
 * Fixed effects: the mean, a difference per design width (those that were read; widths are the same in all lots), and the
 * trend. Trend columns are 1 at the outermost die and 0 on average over the dies, so that a wafer's mean keeps its meaning.
 */
export function designOf(question: DesignQuestion): Design {
  const { leaves, mean, widthSd, trend, trendSd } = question;
  const widths = [...new Set(leaves.map((l) => l.widthUm).filter((w) => w !== undefined))].sort((a, b) =>
    a - b
  );
  const width = widthColumns(widths);
  const shape = trend === null ? null : trendColumns(question.places, trend);
  const names = ["mean", ...width.names, ...shape?.names ?? []];
  return {
    names,
    rowOf: ({ lot, die, widthUm }) => [
      1,
      ...width.row(widthUm),
      ...shape === null ? [] : trend!.lots === "own" && lot !== question.lot ? shape.zero : shape.row(die),
    ],
    prior: {
      mean: names.map((_, i) => i === 0 ? mean.value : 0),
      sd: names.map((_, i) => i === 0 ? mean.u : i <= width.names.length ? widthSd : trendSd),
    },
    newWidthVariance(widthUm) {
      if (widths.length === 0 || widthUm === undefined || width.covers(widthUm)) return 0;
      // With one width read, its own difference hides in the mean and is unknown too.
      return (widths.length === 1 ? 2 : 1) * widthSd ** 2;
    },
  };
}

function widthColumns(widths: readonly number[]) {
  if (widths.length < 2) {
    return { names: [], row: () => [], covers: (w: number) => widths.includes(w) };
  }
  if (widths.length > MOST_WIDTHS) {
    const [least, most] = [widths[0]!, widths[widths.length - 1]!];
    const along = (w: number) => (2 * w - least - most) / (most - least);
    return {
      names: ["width"],
      row: (w: number | undefined) => [w === undefined ? 0 : along(w)],
      covers: (w: number) => w >= least && w <= most,
    };
  }
  return {
    names: widths.map((w) => `width ${w} µm`),
    // A reading of a whole die or wafer speaks for the average of its widths.
    row: (w: number | undefined) => widths.map((v) => w === undefined ? 1 / widths.length : v === w ? 1 : 0),
    covers: (w: number) => widths.includes(w),
  };
}

function trendColumns(places: ReadonlyMap<string, Place>, { radial, linear }: TrendShape) {
  const all = [...places.values()];
  const edge = Math.max(...all.map((p) => Math.hypot(p.x, p.y)));
  const average = (f: (p: Place) => number) => all.reduce((sum, p) => sum + f(p), 0) / all.length;
  const terms = [
    ...(radial ? [{ name: "radial", of: (p: Place) => (p.x ** 2 + p.y ** 2) / edge ** 2 }] : []),
    ...(linear
      ? [{ name: "x", of: (p: Place) => p.x / edge }, { name: "y", of: (p: Place) => p.y / edge }]
      : []),
  ].map((term) => ({ ...term, centre: average(term.of) }));
  const zero = terms.map(() => 0);
  return {
    names: terms.map((t) => t.name),
    zero,
    row: (die: string | undefined) => {
      if (die === undefined) return zero;
      const place = places.get(die);
      if (place === undefined) {
        throw new RangeError(`Cannot follow a trend to die ${die}: its place on the wafer is not known`);
      }
      return terms.map((t) => t.of(place) - t.centre);
    },
  };
}
