// Pure: no I/O, no clock, no hidden randomness.
import type { Random } from "../../../shared/random.ts";

/** What carries an attribute as a whole: a wafer with its dies, a die with its guides, or a single unit. */
export interface Block {
  readonly units: number;
  readonly affected: number;
  readonly has: boolean;
  /** Blocks are compared with blocks of the same stratum only. */
  readonly stratum: string;
}

export interface ShuffleResult {
  /** P(at least as many affected beyond expectation among the carriers) if the attribute were dealt out by chance. */
  readonly p: number;
  /** The smallest p that another dealing could have given. */
  readonly least: number;
  readonly method: "exact" | "sampled";
}

/**
 * Excesses are rounded to this grid, so that sums are integers and do not depend on the order of addition. Sums that
 * are equal but for that rounding differ by at most half a step per block.
 */
const GRID = 1e-10;
const MOST_STATES = 200_000;
const SAMPLES = 9_999;

type Distribution = Map<number, number>;

/**
 * Test of over-representation by dealing the attribute anew among the blocks of each stratum, as often as it occurs
 * there. The statistic is the number of affected units in carrying blocks less their expectation, units × share
 * affected in the stratum, summed. For blocks of one unit in one stratum this is Fisher's one-sided exact test; for
 * larger blocks it allows that the units of a block share their fate, where Fisher's would count every die of one bad
 * wafer as evidence against the wafer's tool (permutation tests: R. A. Fisher, The Design of Experiments (1935),
 * chapter 3). All dealings are counted where their sums are few enough, else 9,999 are drawn and p = (as extreme +
 * 1)/10,000.
 * @throws RangeError for impossible counts
 */
export function shuffleTest(blocks: readonly Block[], random: Random): ShuffleResult {
  const strata = new Map<string, Block[]>();
  for (const b of blocks) {
    if (
      !Number.isSafeInteger(b.units) || !Number.isSafeInteger(b.affected) || b.affected < 0 ||
      b.affected > b.units
    ) {
      throw new RangeError(`Cannot test a block with ${b.affected} of ${b.units} affected: need integers`);
    }
    if (b.units > 0) strata.set(b.stratum, [...strata.get(b.stratum) ?? [], b]);
  }
  const excesses = [...strata.values()].map(withExcess);
  const observed = excesses.flat().reduce((s, b) => s + (b.has ? b.excess : 0), 0);
  const tie = blocks.length;
  let all: Distribution | null = new Map([[0, 1]]);
  for (const stratum of excesses) {
    const one = dealings(stratum);
    all = one && all && convolve(all, one);
    if (all === null) return sampled(excesses, observed - tie, random);
  }
  const keys = [...all.keys()].sort((a, b) => b - a);
  const least = keys.filter((k) => k >= keys[0]! - tie).reduce((s, k) => s + all.get(k)!, 0);
  const p = keys.filter((k) => k >= observed - tie).reverse().reduce((s, k) => s + all.get(k)!, 0);
  return { p: Math.min(1, p), least: Math.min(1, least), method: "exact" };
}

interface Excess {
  readonly has: boolean;
  /** In steps of the grid. */
  readonly excess: number;
}

function withExcess(stratum: readonly Block[]): Excess[] {
  const units = stratum.reduce((s, b) => s + b.units, 0);
  const affected = stratum.reduce((s, b) => s + b.affected, 0);
  return stratum.map((b) => ({
    has: b.has,
    excess: Math.round((b.affected - b.units * affected / units) / GRID),
  }));
}

/** Distribution of the statistic of one stratum over all dealings, null if it has too many values. */
function dealings(stratum: readonly Excess[]): Distribution | null {
  const carriers = stratum.filter((b) => b.has).length;
  const kinds = new Map<number, number>();
  for (const b of stratum) {
    kinds.set(b.excess, (kinds.get(b.excess) ?? 0) + 1);
  }
  const logFactorial = [0];
  for (let i = 1; i <= stratum.length; i++) logFactorial.push(logFactorial[i - 1]! + Math.log(i));
  const logChoose = (n: number, k: number) => logFactorial[n]! - logFactorial[k]! - logFactorial[n - k]!;
  // By carriers dealt so far: sum → logarithm of the number of dealings.
  let dealt: Distribution[] = [new Map([[0, 0]])];
  for (const [excess, count] of kinds) {
    const next: Distribution[] = [];
    let states = 0;
    for (const [k, sums] of dealt.entries()) {
      for (let j = 0; j <= count && k + j <= carriers; j++) {
        const target = next[k + j] ??= new Map();
        for (const [sum, log] of sums) {
          const key = sum + j * excess;
          const held = target.get(key);
          const added = log + logChoose(count, j);
          target.set(key, held === undefined ? added : logSum(held, added));
          if (held === undefined && ++states > MOST_STATES) return null;
        }
      }
    }
    for (let k = 0; k < next.length; k++) next[k] ??= new Map();
    dealt = next;
  }
  const all = logChoose(stratum.length, carriers);
  return new Map([...dealt[carriers]!].map(([sum, log]) => [sum, Math.exp(log - all)]));
}

function logSum(a: number, b: number): number {
  return Math.max(a, b) + Math.log1p(Math.exp(-Math.abs(a - b)));
}

function convolve(a: Distribution, b: Distribution): Distribution | null {
  if (a.size * b.size > 100 * MOST_STATES) return null;
  const sum: Distribution = new Map();
  for (const [x, p] of a) {
    for (const [y, q] of b) sum.set(x + y, (sum.get(x + y) ?? 0) + p * q);
    if (sum.size > MOST_STATES) return null;
  }
  return sum;
}

function sampled(strata: readonly (readonly Excess[])[], limit: number, random: Random): ShuffleResult {
  const pools = strata.map((s) => ({
    excess: s.map((b) => b.excess),
    carriers: s.filter((b) => b.has).length,
  }));
  let extreme = 0;
  for (let n = 0; n < SAMPLES; n++) {
    let sum = 0;
    for (const { excess, carriers } of pools) {
      // The first places of a partial shuffle (R. Durstenfeld, Commun. ACM 7, 420 (1964)) are a fair draw.
      for (let i = 0; i < carriers; i++) {
        const j = i + random.below(excess.length - i);
        [excess[i], excess[j]] = [excess[j]!, excess[i]!];
        sum += excess[i]!;
      }
    }
    if (sum >= limit) extreme++;
  }
  return { p: (extreme + 1) / (SAMPLES + 1), least: 1 / (SAMPLES + 1), method: "sampled" };
}
