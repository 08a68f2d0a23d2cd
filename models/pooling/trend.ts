// Pure: no I/O, no clock, no hidden randomness.
import { spreadMode, type SpreadPrior } from "./components.ts";
import { type Design, designOf, type DesignQuestion, type TrendShape } from "./design.ts";
import { spreadDensityOf, spreadsOf } from "./lot_fit.ts";

/** A trend that was tried, and how much more probable it makes the readings than no trend. */
export interface TrendTrial {
  readonly shape: TrendShape;
  /** ln of the Bayes factor against no trend; for a hopeless one only at the spreads without a trend. */
  readonly logFactor: number;
}

export interface TrendChoice {
  /** The trend taken; null: the readings do not support one. */
  readonly taken: TrendShape | null;
  readonly trials: readonly TrendTrial[];
  readonly design: Design;
}

/**
 * A trend is taken only when the readings are this much more probable with it than without: "strong" on the scale of
 * R. E. Kass & A. E. Raftery, J. Am. Stat. Assoc. 90, 773 (1995) (from memory). If there is no trend, a Bayes factor above 20
 * turns up in at most one data set of 20 (Markov's inequality), in practice far less often.
 */
export const STRONG_EVIDENCE = 20;

const SHAPES = [
  { radial: true, linear: false },
  { radial: false, linear: true },
  { radial: true, linear: true },
];

/** Trends this unlikely (ln) at the spreads without a trend are not followed up: other spreads bring no such gain. */
const HOPELESS = -4;

/**
 * Chooses the trend over the wafer by the evidence, slopes and spreads integrated (spreads by Laplace's method). Slopes have
 * the prior of the question, centred on 0: few dies then say neither yes nor no, and no trend is taken. Trends that all
 * lots share are tried once, those of a single lot when that lot is asked for.
 */
export function trendChooser(
  question: Omit<DesignQuestion, "trend" | "lot">,
  prior: SpreadPrior,
  need: number = STRONG_EVIDENCE,
): (lot: string) => TrendChoice {
  const { leaves, places } = question;
  const none = designOf({ ...question, trend: null, lot: "" });
  const dies = new Set(leaves.map((l) => l.die).filter((d) => d !== undefined));
  const apart = [...places.values()].some((p) => Math.hypot(p.x, p.y) > 0);
  if (need === Infinity || dies.size < 3 || !apart || [...dies].some((d) => !places.has(d))) {
    return () => ({ taken: null, trials: [], design: none });
  }
  const without = spreadsOf(leaves, none, prior).mode;
  const attempt = (shape: TrendShape, lot: string) => {
    const design = designOf({ ...question, trend: shape, lot });
    const { density } = spreadDensityOf(leaves, design, prior);
    const atOnce = density(without.at) - without.value;
    const logFactor = atOnce < HOPELESS
      ? atOnce
      : spreadMode(density, prior, without.at).logEvidence - without.logEvidence;
    return { shape, logFactor, design };
  };
  const common = SHAPES.map((s) => attempt({ ...s, lots: "all" }, ""));
  const lots = new Set(leaves.map((l) => l.lot));
  return (lot) => {
    // A trend of one lot needs readings of that lot; with a single lot it is the same as a common one.
    const own = lots.size > 1 && lots.has(lot) ? SHAPES.map((s) => attempt({ ...s, lots: "own" }, lot)) : [];
    const tried = [...common, ...own];
    const best = tried.reduce((a, b) => b.logFactor > a.logFactor ? b : a);
    const taken = best.logFactor >= Math.log(need);
    return {
      taken: taken ? best.shape : null,
      trials: tried.map(({ shape, logFactor }) => ({ shape, logFactor })),
      design: taken ? best.design : none,
    };
  };
}
