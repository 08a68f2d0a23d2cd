// Pure: no I/O, no clock, no hidden randomness.
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import type { Leaf, LotObservation } from "./forest.ts";
import { joined, type LotFit, type Mixture } from "./lot_fit.ts";

/** A reading, or all readings of one unit, that the others do not lead one to expect. It stays in use. */
export interface Contradiction {
  /** Full id of the guide, die or wafer that was read. */
  readonly unit: string;
  /** Handles of the readings. */
  readonly readings: readonly number[];
  readonly value: number;
  /** What the other readings predict for it, and how well (reading error included). */
  readonly expected: number;
  readonly uExpected: number;
  /** (value − expected)/uExpected. */
  readonly standardised: number;
  /** Probability of a reading at least as far off, from the other readings alone. */
  readonly p: number;
}

/** Readings of one lot that are left out together. */
interface Deletion {
  readonly leaf: Leaf;
  readonly members: readonly number[];
  readonly value: number;
  readonly variance: number;
}

/** No more than this many are named: where so many contradict, the model is wrong and not the readings. */
const MOST_NAMED = 8;

/**
 * Readings of a lot that contradict their neighbours, by deletion residuals: each is predicted from all readings but
 * itself. In closed form from the posterior (mean m and variance v of the true value): (y − m)/√(u² − v), which is normal
 * for known variances (R. D. Cook & S. Weisberg, Residuals and Influence in Regression, 1982; from memory); over the
 * spreads it is averaged with the weights that the points have without that reading. The worst is then fitted anew without
 * it, so that it cannot hide behind the spread that it makes itself; if it is confirmed, the search goes on without it.
 * @param alpha probability of naming anything among good readings: each is held against alpha/(number of deletions)
 * @param refit the fit without some observations (positions)
 */
export function contradictions(
  observations: readonly LotObservation[],
  lot: string,
  fit: LotFit,
  refit: (without: ReadonlySet<number>) => LotFit | null,
  alpha: number,
): Contradiction[] {
  const found: Contradiction[] = [];
  const aside = new Set<number>();
  let base = fit;
  const count = deletions(observations, base, lot).length;
  if (count < 2) return found;
  const limit = alpha / count;
  while (found.length < MOST_NAMED) {
    let worst: Deletion | null = null;
    let least = Infinity;
    for (const deletion of deletions(observations, base, lot)) {
      const p = approximateTail(deletion, base);
      if (p < least) [least, worst] = [p, deletion];
    }
    // A reading that hides itself looks better than it is: the exact answer is asked for well above the limit.
    if (worst === null || least > Math.min(0.05, 20 * limit)) break;
    const without = new Set([...aside, ...worst.members]);
    const next = refit(without);
    if (next === null) break;
    const contradiction = judge(worst, next.ask(worst.leaf), observations);
    if (contradiction.p > limit) break;
    found.push(contradiction);
    worst.members.forEach((k) => aside.add(k));
    base = next;
  }
  return found;
}

/** Every unit of the lot as a whole, and every single reading of units that were read more than once. */
function deletions(observations: readonly LotObservation[], fit: LotFit, lot: string): Deletion[] {
  return fit.forest.leaves.filter((leaf) => leaf.lot === lot).flatMap((leaf) => [
    { leaf, members: leaf.members, value: leaf.value, variance: leaf.variance },
    ...leaf.members.length < 2 ? [] : leaf.members.map((k) => {
      const { value, u } = observations[k]!;
      return { leaf, members: [k], value, variance: Math.max(u * u, leaf.variance) };
    }),
  ]);
}

/** Two-sided probability of a deletion residual, from the fit that still holds the reading. */
function approximateTail({ leaf, value, variance }: Deletion, fit: LotFit): number {
  const { share, mean, variance: v } = fit.ask(leaf);
  const left = v.map((x) => Math.max(variance - x, 1e-12 * variance));
  const t = mean.map((m, k) => (value - m) / Math.sqrt(left[k]!));
  // Without the reading a point's weight is divided by the density the point gives it; its sd there is variance/√left.
  const log = t.map((z, k) => Math.log(share[k]!) + 0.5 * z * z - 0.5 * Math.log(left[k]!));
  const top = log.reduce((a, b) => Math.max(a, b), -Infinity);
  let sum = 0;
  let tail = 0;
  for (let k = 0; k < share.length; k++) {
    const w = Math.exp(log[k]! - top);
    sum += w;
    tail += w * 2 * normalCdf(-Math.abs(t[k]!), 0, 1);
  }
  return tail / sum;
}

function judge(
  { leaf, members, value, variance }: Deletion,
  { share, mean, variance: v }: Mixture,
  observations: readonly LotObservation[],
): Contradiction {
  const total = v.map((x) => x + variance);
  const { value: expected, u: uExpected } = joined({ share, mean, variance: total });
  const p = share.reduce(
    (sum, s, k) => sum + s * 2 * normalCdf(-Math.abs(value - mean[k]!) / Math.sqrt(total[k]!), 0, 1),
    0,
  );
  return {
    unit: leaf.guide ?? leaf.die ?? leaf.wafer,
    readings: members.map((k) => observations[k]!.index),
    value,
    expected,
    uExpected,
    standardised: (value - expected) / uExpected,
    p,
  };
}
