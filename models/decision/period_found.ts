// Pure: no I/O, no clock, no hidden randomness.
import { mean, quantileOfSorted, standardDeviation } from "../../shared/statistics.ts";

/** A poling window: how many domains were counted in it, and how many it holds if the period is the one drawn. */
export interface CountedWindow {
  /** Inverted domains found, and merged ones counted as what they are made of. */
  readonly domains: number;
  /** Length over the drawn period. */
  readonly drawn: number;
}

/** Domains per window that a count may be off in all windows alike: who counts cut domains, or leaves them out. */
export interface CountingOffset {
  readonly offset: number;
  readonly u: number;
}

/** Nothing known of the counting: anywhere in ±½ domain. */
export const UNKNOWN_COUNTING: CountingOffset = { offset: 0, u: 1 / Math.sqrt(12) };

/**
 * Where a window's ends fall among the domains is chance: floor or ceil of its length over the period, a standard deviation
 * of ½ at most.
 */
const CHANCE = 0.5;
/** Fewer domains than this in all windows say too little. */
const LEAST_DOMAINS = 20;
/** Fewer groups can't outvote one that is off. */
const LEAST_GROUPS = 4;

/**
 * How far domains are denser than drawn, relative, from windows that share their period. A count is
 * drawn·(1 + density) + offset + chance; the offset is common to all windows and known as well as it is said to be, so that it
 * averages out over windows of different length only. Generalised least squares, offset and density together.
 * @returns null for too few domains to say anything
 */
export function densityFromWindows(
  windows: readonly CountedWindow[],
  { offset, u }: CountingOffset = UNKNOWN_COUNTING,
): { density: number; u: number } | null {
  const domains = windows.reduce((sum, w) => sum + w.domains, 0);
  if (domains < LEAST_DOMAINS) return null;
  const solve = (chance: number) => {
    let [xx, x1, n, xr, r1] = [0, 0, 0, 0, 0];
    for (const w of windows) {
      const r = w.domains - w.drawn - offset;
      xx += w.drawn ** 2;
      x1 += w.drawn;
      n += 1;
      xr += w.drawn * r;
      r1 += r;
    }
    // The prior of the offset is one more equation: 0 with its u.
    const prior = chance ** 2 / Math.max(u, 1e-9) ** 2;
    const det = xx * (n + prior) - x1 * x1;
    return {
      density: ((n + prior) * xr - x1 * r1) / det,
      shift: (xx * r1 - x1 * xr) / det,
      u: chance * Math.sqrt((n + prior) / det),
    };
  };
  const first = solve(CHANCE);
  const left = windows.map((w) => w.domains - w.drawn * (1 + first.density) - offset - first.shift);
  const scatter = windows.length < 5 ? 0 : standardDeviation(left);
  const { density, u: uDensity } = scatter > CHANCE ? solve(scatter) : first;
  return { density, u: uDensity };
}

/**
 * How domains are counted, as the groups of a lot show it: the median over groups of their mean count above what was drawn,
 * so that a few groups with a wrong period do not pass for a habit. With fewer than four groups, or where they scatter as
 * widely as ignorance (half of them off: which half?) or agree on more than half a domain, nothing is known.
 * @param groups windows of every group, the one to be judged among them
 */
export function countingOffset(groups: readonly (readonly CountedWindow[])[]): CountingOffset {
  const means = groups.filter((g) => g.length > 0).map((g) => mean(g.map((w) => w.domains - w.drawn)))
    .sort((a, b) => a - b);
  if (means.length < LEAST_GROUPS) return UNKNOWN_COUNTING;
  const fewest = Math.min(...groups.filter((g) => g.length > 0).map((g) => g.length));
  const middle = quantileOfSorted(means, 0.5);
  // Quartiles: one group that is off does not spoil what the groups agree on, a third of them does.
  const quartiles = (quantileOfSorted(means, 0.75) - quantileOfSorted(means, 0.25)) / 1.349;
  const scatter = Math.max(quartiles, CHANCE / Math.sqrt(fewest));
  const u = 1.2533 * scatter / Math.sqrt(means.length); // of a median of normal values
  // More than half a domain is no habit: most groups are off then, and nothing is known.
  return u < UNKNOWN_COUNTING.u && Math.abs(middle) < 0.5 + 3 * u
    ? { offset: Math.max(-0.5, Math.min(0.5, middle)), u }
    : UNKNOWN_COUNTING;
}

/** Fewer repeats of a period say too little. */
const LEAST_STEPS = 20;
/** Walls farther than this share of a period from their places are no lattice. */
const LOOSE = 0.15;

/**
 * Period of a list of walls. Every second wall is one edge of the inverted domains; missing domains leave steps of two and more
 * periods, which the median step tells. A straight line through (number, place) of each of the two edges gives the period;
 * their mean does not move with a duty cycle that drifts. u is that of the line, with what walls add that
 * wander together, as the residuals show it. Where walls are no
 * lattice, the median step with the spread of its quartiles. Unit: that of the positions.
 */
export function periodFromWalls(positions: ArrayLike<number>): { period: number; u: number } | null {
  const steps = new Float64Array(Math.max(0, positions.length - 2));
  if (steps.length < LEAST_STEPS) return null;
  for (let i = 0; i < steps.length; i++) steps[i] = positions[i + 2]! - positions[i]!;
  steps.sort();
  const median = quantileOfSorted(steps, 0.5);
  const s = (quantileOfSorted(steps, 0.75) - quantileOfSorted(steps, 0.25)) / 1.349; // quartiles of a normal
  // Neighbouring steps share a wall: two of them count as one.
  const rough = { period: median, u: 1.2533 * s / Math.sqrt(steps.length / 2) };
  const edges = [0, 1].map((first) => edgeLine(positions, first, median));
  if (edges.some((e) => e === null)) return rough;
  return { period: mean(edges.map((e) => e!.slope)), u: Math.max(...edges.map((e) => e!.u)) };
}

/** Straight line through every second wall; null where they are not on a lattice. */
function edgeLine(positions: ArrayLike<number>, first: number, period: number) {
  const numbers: number[] = [];
  const places: number[] = [];
  for (let i = first; i < positions.length; i += 2) {
    const place = positions[i]!;
    const gone = places.length === 0 ? 0 : Math.round((place - places.at(-1)!) / period);
    if (places.length > 0 && gone < 1) return null;
    numbers.push((numbers.at(-1) ?? 0) + gone);
    places.push(place);
  }
  const [n0, p0] = [mean(numbers), mean(places)];
  let [nn, np] = [0, 0];
  for (const [k, n] of numbers.entries()) {
    nn += (n - n0) ** 2;
    np += (n - n0) * (places[k]! - p0);
  }
  const slope = np / nn;
  const left = numbers.map((n, k) => places[k]! - p0 - slope * (n - n0));
  const squares = left.reduce((sum, e) => sum + e * e, 0);
  const s = Math.sqrt(squares / Math.max(1, left.length - 2));
  if (s > LOOSE * period) return null;
  // Where walls wander, places far apart differ by more than neighbours do; the slope of a walk of n steps has 6/5·q/n.
  const lag = Math.max(2, Math.floor(left.length / 10));
  const wander = Math.max(0, (meanSquareDifference(left, lag) - meanSquareDifference(left, 1)) / (lag - 1));
  return { slope, u: Math.sqrt(squares / Math.max(1, left.length - 2) / nn + 1.2 * wander / left.length) };
}

function meanSquareDifference(x: readonly number[], lag: number): number {
  let sum = 0;
  for (let k = lag; k < x.length; k++) sum += (x[k]! - x[k - lag]!) ** 2;
  return sum / (x.length - lag);
}
