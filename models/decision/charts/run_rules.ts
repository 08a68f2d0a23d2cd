// Pure: no I/O, no clock, no hidden randomness.

/**
 * Rules that find a cause in a sequence of standardised points. The first three and `8_same_side` are those of the
 * Western Electric Statistical Quality Control Handbook (1956); all, with nine in place of eight on one side, those
 * of L. S. Nelson, J. Quality Technol. 16, 237 (1984). A point counts as beyond a line only strictly beyond it.
 */
export const RUN_RULES = {
  "beyond_3s": "one point beyond 3 standard deviations",
  "2of3_beyond_2s": "two of three points beyond 2 standard deviations on one side",
  "4of5_beyond_1s": "four of five points beyond 1 standard deviation on one side",
  "8_same_side": "eight points in a row on one side of the centre",
  "9_same_side": "nine points in a row on one side of the centre",
  "6_trend": "six points in a row, each higher or each lower than the one before",
  "14_alternating": "fourteen points in a row, alternately up and down",
  "15_within_1s": "fifteen points in a row within 1 standard deviation of the centre",
  "8_beyond_1s_both": "eight points in a row beyond 1 standard deviation, on either side",
} as const;

export type RunRule = keyof typeof RUN_RULES;

/** The four rules of the Western Electric handbook: in control, a signal every 91.75 points in the mean. */
export const WESTERN_ELECTRIC: readonly RunRule[] = [
  "beyond_3s",
  "2of3_beyond_2s",
  "4of5_beyond_1s",
  "8_same_side",
];

/** The eight rules of Nelson. */
export const NELSON: readonly RunRule[] = [
  "beyond_3s",
  "9_same_side",
  "6_trend",
  "14_alternating",
  "2of3_beyond_2s",
  "4of5_beyond_1s",
  "15_within_1s",
  "8_beyond_1s_both",
];

export interface Signal {
  readonly rule: RunRule;
  /** Position (from 0) of the point that completes the pattern. */
  readonly at: number;
  /** Positions of the points that make the pattern, ascending; the last is `at`. */
  readonly over: readonly number[];
  /** Side of the centre, or the direction of a trend; null where the pattern has none. */
  readonly side: "above" | "below" | null;
}

interface Sides {
  readonly length: number;
  readonly needed: number;
  readonly beyond: number;
}

const ONE_SIDED: Partial<Record<RunRule, Sides>> = {
  "beyond_3s": { length: 1, needed: 1, beyond: 3 },
  "2of3_beyond_2s": { length: 3, needed: 2, beyond: 2 },
  "4of5_beyond_1s": { length: 5, needed: 4, beyond: 1 },
  "8_same_side": { length: 8, needed: 8, beyond: 0 },
  "9_same_side": { length: 9, needed: 9, beyond: 0 },
};

/**
 * Every signal of some rules in a sequence of z = (value − centre)/standard deviation, in the order of the points, at
 * one point in the order of `rules`. A pattern that goes on signals at each further point; {@link joinSignals} makes
 * one of them. NaN is no point: the rules see the points before and after it as neighbours, and positions still count
 * it.
 * @throws RangeError for an unknown rule or one asked for twice
 */
export function runSignals(
  z: ArrayLike<number>,
  rules: readonly RunRule[] = WESTERN_ELECTRIC,
): Signal[] {
  for (const [i, rule] of rules.entries()) {
    if (!Object.hasOwn(RUN_RULES, rule) || rules.indexOf(rule) !== i) {
      throw new RangeError(
        `Cannot apply run rule "${rule}": need one of ${Object.keys(RUN_RULES).join(", ")}, each once`,
      );
    }
  }
  const at: number[] = [];
  for (let i = 0; i < z.length; i++) if (!Number.isNaN(z[i]!)) at.push(i);
  const points = at.map((i) => z[i]!);
  const signals: Signal[] = [];
  for (let end = 0; end < points.length; end++) {
    for (const rule of rules) {
      for (const found of patterns(rule, points, end)) {
        signals.push({ rule, at: at[end]!, over: found.over.map((i) => at[i]!), side: found.side });
      }
    }
  }
  return signals;
}

type Pattern = Pick<Signal, "over" | "side">;

/** The patterns of one rule that the point at `end` completes. */
function patterns(rule: RunRule, z: readonly number[], end: number): Pattern[] {
  const sides = ONE_SIDED[rule];
  if (sides !== undefined) {
    const sided = [["above", 1], ["below", -1]] as const;
    return sided.flatMap(([side, sign]) => {
      // Early in a sequence fewer points than the window may already be enough: two of the first two.
      const over: number[] = [];
      for (let i = Math.max(0, end - sides.length + 1); i <= end; i++) {
        if (sign * z[i]! > sides.beyond) over.push(i);
      }
      return over.length >= sides.needed && over.at(-1) === end ? [{ over, side }] : [];
    });
  }
  switch (rule) {
    case "6_trend":
      return ([["above", 1], ["below", -1]] as const)
        .flatMap(([side, sign]) => row(end, 6, side, (i, k) => k === 0 || sign * (z[i]! - z[i - 1]!) > 0));
    case "14_alternating":
      return row(end, 14, null, (i, k) => {
        const step = Math.sign(z[i]! - z[i - 1]!);
        return k === 0 || (step !== 0 && (k === 1 || step === -Math.sign(z[i - 1]! - z[i - 2]!)));
      });
    case "15_within_1s":
      return row(end, 15, null, (i) => Math.abs(z[i]!) < 1);
    default:
      return row(end, 8, null, (i) => Math.abs(z[i]!) > 1);
  }
}

/** The last `length` points as a pattern if each (`k` counts from the first) belongs to it. */
function row(
  end: number,
  length: number,
  side: Signal["side"],
  belongs: (i: number, k: number) => boolean,
): Pattern[] {
  const over: number[] = [];
  for (let k = 0; k < length; k++) {
    const i = end - length + 1 + k;
    if (i < 0 || !belongs(i, k)) return [];
    over.push(i);
  }
  return [{ over, side }];
}

/**
 * Signals of one rule and side whose patterns share a point, as one signal over all their points (`at` is the last): what
 * a reader is told once. In the order of their last points.
 */
export function joinSignals(signals: readonly Signal[]): Signal[] {
  const open = new Map<string, Signal>();
  const done: Signal[] = [];
  for (const s of signals) {
    const key = `${s.rule}/${s.side}`;
    const before = open.get(key);
    if (before !== undefined && s.over.some((i) => before.over.includes(i))) {
      const over = [...new Set([...before.over, ...s.over])].sort((a, b) => a - b);
      open.set(key, { ...s, over });
      continue;
    }
    if (before !== undefined) done.push(before);
    open.set(key, s);
  }
  return [...done, ...open.values()].sort((a, b) => a.at - b.at);
}
