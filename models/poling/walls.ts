// Pure: no I/O, no clock, no hidden randomness.
import { mean, standardDeviation } from "../../shared/statistics.ts";
import { checkGrating, type Grating, invertedDomainsIn } from "./grating.ts";

/** Where a guide was meant to be poled, m from the input facet. */
export interface PoledSection {
  readonly poledFrom: number;
  readonly poledLength: number;
  readonly period: number;
  readonly guideLength: number;
}

export interface WallsVerdict {
  readonly complete: boolean;
  /** Why the list may not be used as exact. */
  readonly reason?: string;
  /** What is odd about a list that is complete by the rule. */
  readonly remarks: readonly string[];
}

const mmText = (z: number): string => `${(z * 1e3).toFixed(3)} mm`;

/**
 * Whether a list of inspected walls (m, from the input facet) may be used as exact: strictly ascending between the
 * facets, and reaching within one period of both ends of the poled section. One missing wall flips everything behind it,
 * so two signs of it are remarked: an odd number of walls though the guide goes on unpoled behind the section, and
 * domains about one whole period long (a missing inverted domain would leave one and a half).
 */
export function wallsComplete(walls: ArrayLike<number>, section: PoledSection): WallsVerdict {
  const { poledFrom, poledLength, period, guideLength } = section;
  const poledTo = poledFrom + poledLength;
  const no = (reason: string): WallsVerdict => ({ complete: false, reason, remarks: [] });
  if (walls.length === 0) return no("no walls");
  let last = 0;
  const lone: number[] = [];
  for (let j = 0; j < walls.length; j++) {
    const z = walls[j]!;
    if (!(z > last && z < guideLength)) {
      return no(`wall ${j + 1} at ${mmText(z)} is not between the wall before it and the output facet`);
    }
    if (j > 0 && Math.abs((z - last) / period - 1) < 0.15) lone.push(j);
    last = z;
  }
  // 1e-9 of a period forgives the rounding of file units.
  const reach = period * (1 + 1e-9);
  if (walls[0]! > poledFrom + reach) {
    return no(`the first wall at ${mmText(walls[0]!)} is more than a period behind the section's start`);
  }
  if (last < poledTo - reach) {
    return no(`the last wall at ${mmText(last)} is more than a period before the section's end`);
  }
  const remarks: string[] = [];
  if (walls.length % 2 === 1 && guideLength - poledTo > period) {
    remarks.push(`odd number of walls (${walls.length}) before an unpoled end: a wall may be missing`);
  }
  if (lone.length > 0) {
    const first = mmText(walls[lone[0]!]!);
    remarks.push(
      lone.length === 1
        ? `a domain about one period long, ending at ${first}: a wall may be missing`
        : `${lone.length} domains about one period long, the first ending at ${first}: walls may be missing`,
    );
  }
  return { complete: true, remarks };
}

/**
 * Inspected walls as a grating. The section is the design's, widened to the outermost walls where they lie beyond it
 * (dicing shifts the facets against the mask); d is +1 at the input facet. Give the design's poled length as
 * `poledLength` to the transform, since a widened section is longer.
 * @throws RangeError for walls that do not ascend between the facets
 */
export function gratingFromWalls(walls: Float64Array, section: PoledSection): Grating {
  const grating: Grating = {
    walls,
    start: Math.max(0, Math.min(section.poledFrom, walls.length > 0 ? walls[0]! : Infinity)),
    end: Math.min(
      section.guideLength,
      Math.max(section.poledFrom + section.poledLength, walls.length > 0 ? walls[walls.length - 1]! : 0),
    ),
    firstSign: 1,
  };
  checkGrating(grating);
  return grating;
}

/** What a list of walls says about poling, in the words of a window summary. */
export interface WallStatistics {
  /** Inverted domains found, merged ones counted once. */
  readonly domains: number;
  /** Inverted domains that the section should have and that are not there, or are merged into their neighbour. */
  readonly merged: number;
  /** merged / (domains + merged). */
  readonly missing: number;
  /** Mean and sample standard deviation of inverted width / period, over `used` unmerged domains; NaN if too few. */
  readonly dutyMean: number;
  readonly dutySd: number;
  readonly used: number;
  /** Slope of the domains' centres against their place in the row, m; NaN for fewer than two. */
  readonly period: number;
  /** Standard deviation of the centres about that line, m: dutySd·Λ/2 if the walls err independently. */
  readonly centreSd: number;
}

/**
 * Statistics of the inverted domains of a grating.
 * @param period design period, m: tells which place in the row a domain has
 */
export function wallStatistics(grating: Grating, period: number): WallStatistics {
  checkGrating(grating);
  const { walls, firstSign, start, end } = grating;
  const widths: number[] = [];
  const centres: number[] = [];
  let domains = 0;
  // With firstSign −1 the first domain is inverted but begins at the section's edge, not at a wall: it is not measured.
  for (let j = firstSign === 1 ? 0 : 1; j + 1 < walls.length; j += 2) {
    const width = walls[j + 1]! - walls[j]!;
    domains++;
    if (width > period) continue;
    widths.push(width / period);
    centres.push((walls[j]! + walls[j + 1]!) / 2);
  }
  const expected = Math.max(domains, invertedDomainsIn(end - start, period));
  const merged = expected - domains;
  const line = fitRow(centres, period);
  return {
    domains,
    merged,
    missing: expected === 0 ? NaN : merged / expected,
    dutyMean: widths.length > 0 ? mean(widths) : NaN,
    dutySd: standardDeviation(widths),
    used: widths.length,
    period: line.slope,
    centreSd: line.sd,
  };
}

/** Least squares of centres against their place; places are counted on from domain to domain, so drift adds up right. */
function fitRow(centres: readonly number[], period: number): { slope: number; sd: number } {
  const n = centres.length;
  if (n < 2) return { slope: NaN, sd: NaN };
  const place = new Float64Array(n);
  for (let k = 1; k < n; k++) {
    place[k] = place[k - 1]! + Math.max(1, Math.round((centres[k]! - centres[k - 1]!) / period));
  }
  const px = mean(place);
  const cy = mean(centres);
  let sxy = 0;
  let sxx = 0;
  for (let k = 0; k < n; k++) {
    sxy += (place[k]! - px) * (centres[k]! - cy);
    sxx += (place[k]! - px) ** 2;
  }
  const slope = sxy / sxx;
  let rest = 0;
  for (let k = 0; k < n; k++) rest += (centres[k]! - cy - slope * (place[k]! - px)) ** 2;
  return { slope, sd: n > 2 ? Math.sqrt(rest / (n - 2)) : NaN };
}
