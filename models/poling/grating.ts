// Pure: no I/O, no clock, no hidden randomness.

/**
 * A poled section as a list of domain walls. Positions in m from the input facet, at 25 °C. Outside [start, end]
 * the crystal is not inverted and is not integrated over.
 */
export interface Grating {
  /** Ascending, each inside [start, end]; the orientation d = ±1 flips at every wall. */
  readonly walls: Float64Array;
  readonly start: number;
  readonly end: number;
  /** d between `start` and the first wall. */
  readonly firstSign: 1 | -1;
}

/** A uniform Δβ grid, 1/m: Δβ_k = first + k·step, k = 0 … count − 1. */
export interface Band {
  readonly first: number;
  readonly step: number;
  readonly count: number;
}

/** A stretch along the guide, m from the input facet. */
export interface Stretch {
  readonly from: number;
  readonly to: number;
}

/** Throws a RangeError unless the walls ascend inside a section of positive length. */
export function checkGrating(grating: Grating): void {
  const { walls, start, end } = grating;
  if (!(Number.isFinite(start) && Number.isFinite(end) && end > start)) {
    throw new RangeError(`Cannot use a grating from ${start} m to ${end} m: need a finite start < end`);
  }
  let last = start;
  for (let j = 0; j < walls.length; j++) {
    const z = walls[j]!;
    // Written so that NaN fails too.
    if (!(z >= last && z <= end)) {
      throw new RangeError(
        `Cannot use a grating: wall ${j} at ${z} m, need ascending walls within ${start} m … ${end} m`,
      );
    }
    last = z;
  }
}

/** d = ±1 of each domain, from `start` to `end`: one more than there are walls. */
export function domainSigns(grating: Grating): Int8Array {
  const signs = new Int8Array(grating.walls.length + 1);
  for (let j = 0; j < signs.length; j++) signs[j] = j % 2 === 0 ? grating.firstSign : -grating.firstSign;
  return signs;
}

/** d at position z (m): +1 outside the section; exactly on a wall, the sign of the domain behind it. */
export function domainSignAt(grating: Grating, z: number): 1 | -1 {
  const { walls, start, end, firstSign } = grating;
  if (z < start || z > end) return 1;
  let low = 0;
  let high = walls.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (walls[middle]! <= z) low = middle + 1;
    else high = middle;
  }
  return low % 2 === 0 ? firstSign : (-firstSign as 1 | -1);
}

/** How many inverted domains fit: the last one must end, at duty ½, within the section. */
export function invertedDomainsIn(length: number, period: number): number {
  if (!(Number.isFinite(length) && length > 0)) {
    throw new RangeError(`Cannot lay out a grating of length ${length} m: need a finite length > 0`);
  }
  if (!(Number.isFinite(period) && period > 0)) {
    throw new RangeError(`Cannot lay out a grating of period ${period} m: need a finite period > 0`);
  }
  // The last domain ends 3/4 into its period; 1e-9 forgives the rounding of length/period.
  return Math.max(0, Math.floor(length / period + 0.25 + 1e-9));
}

/**
 * How many inverted domains a mask lays in a section: also a last one that the section's end cuts short, so that the
 * grating is as long as the section whatever fraction of a period it ends with.
 */
export function laidDomainsIn(length: number, period: number): number {
  invertedDomainsIn(length, period); // refuses what can't be laid out
  // A last domain, a quarter of a period behind the last whole one, needs room to begin; 1e-9 forgives rounding.
  return Math.max(0, Math.ceil(length / period - 0.25 - 1e-9));
}

/**
 * The ideal grating: in every period one inverted domain of width duty·period, in the middle of the period, so that
 * a duty error moves both of its walls and leaves the phase of the grating alone.
 * @param at start, length, period in m; duty = inverted width / period, inside 0…1 (default ½)
 */
export function uniformGrating(
  at: { readonly start: number; readonly length: number; readonly period: number; readonly duty?: number },
): Grating {
  const duty = at.duty ?? 0.5;
  if (!(duty > 0 && duty < 1)) {
    throw new RangeError(`Cannot lay out a grating of duty ${duty}: need 0 < duty < 1`);
  }
  const count = laidDomainsIn(at.length, at.period);
  const end = at.start + at.length;
  const walls = new Float64Array(2 * count);
  for (let n = 0; n < count; n++) {
    const centre = at.start + (n + 0.5) * at.period;
    walls[2 * n] = Math.min(end, centre - duty * at.period / 2);
    walls[2 * n + 1] = Math.min(end, centre + duty * at.period / 2);
  }
  return { walls, start: at.start, end, firstSign: 1 };
}

/**
 * Stretches of the section without a wall that are longer than three periods: nothing is generated there, so the
 * weight w(z) of a heralding efficiency is zero.
 * @param period design period, m
 */
export function unpoledGaps(grating: Grating, period: number): Stretch[] {
  if (!(period > 0)) throw new RangeError(`Cannot look for gaps: period ${period} m, need > 0`);
  const gaps: Stretch[] = [];
  let from = grating.start;
  for (let j = 0; j <= grating.walls.length; j++) {
    const to = j < grating.walls.length ? grating.walls[j]! : grating.end;
    if (to - from > 3 * period) gaps.push({ from, to });
    from = to;
  }
  return gaps;
}
