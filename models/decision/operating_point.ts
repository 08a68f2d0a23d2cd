// Pure: no I/O, no clock, no hidden randomness.
import { mismatchOverTemperature } from "../guides/mod.ts";
import {
  bandForPeak,
  type Grating,
  type GratingSpectrum,
  gratingSpectrum,
  type MismatchProfile,
  peakTemperatures,
  phaseMatchingTemperatures,
  type Temperatures,
} from "../poling/mod.ts";
import type { GuideGeometry, ThreeWaves } from "../../shared/vocabulary.ts";
import { type PlatformModel, validTemperatures } from "./platform_model.ts";

/** Where a guide is run. */
export interface OperatingPoint {
  /** Oven temperature, °C: the lowest root, or the nearest temperature without one. */
  readonly temperatureC: number;
  readonly matched: boolean;
  /** Further temperatures that match, ascending. */
  readonly others: readonly number[];
  /** The waves there: those of the request, or tuned with ω_s/ω_p kept. */
  readonly waves: ThreeWaves;
  readonly tuned: boolean;
}

export interface OperatingQuestion {
  readonly waves: ThreeWaves;
  /** Range of the oven, °C. */
  readonly oven: readonly [number, number];
  /** Range of the pump's vacuum wavelength (m) if the pump may be tuned. */
  readonly tunable: readonly [number, number] | null;
  readonly geometry: GuideGeometry;
  /** Design period and poled length at 25 °C, m. */
  readonly period: number;
  readonly poledLength: number;
  /** The grating, if its walls are all known: then |φ|² decides, else the design period. */
  readonly walls: Grating | null;
  /** What the cross-section makes of Δβ along the guide; with it `walls` has to be given, an ideal grating if need be. */
  readonly profile?: MismatchProfile | undefined;
}

/** Steps in which a tunable pump is scanned on either side of its nominal wavelength. */
const PUMP_STEPS = 60;
/** The tuned pump wavelength is found to this accuracy, m. */
const PUMP_TOLERANCE = 1e-14;

/** Finds operating points of one guide for any offset of Δβ; what does not depend on the offset is worked out once. */
export interface OperatingPoints {
  /** @param offset added to Δβ, 1/m */
  at(offset: number): OperatingPoint;
}

/**
 * Temperature of operation: the root of |Δβ(T)| = 2π/Λ(T), either sign, within the oven and the validity of the
 * indices, expansion included; with complete walls the temperature where |φ|² peaks. The pump is tuned only when its
 * nominal wavelength has no root: to the nearest wavelength that has one, ω_s/ω_p kept.
 * @returns the reason when there is no temperature at which the process is defined
 */
export function operatingPoints(
  model: PlatformModel,
  question: OperatingQuestion,
): OperatingPoints | { readonly reason: string } {
  const { waves, oven, geometry, tunable } = question;
  const valid = validTemperatures(model, waves, geometry);
  if ("reason" in valid) return valid;
  const range = intersect(oven, valid.range);
  if (range === null) {
    return {
      reason: `the oven (${oven[0]}–${oven[1]} °C) lies outside the index of ${model.id} (${valid.range[0]}–${
        valid.range[1]
      } °C)`,
    };
  }
  const spectrumFor = peakSpectrum(question);
  const nominal = matcher(model, question, waves, range, valid.range, spectrumFor);
  const tunedMatchers = new Map<number, Matcher | null>();
  const matcherAt = (lambdaP: number): Matcher | null => {
    const held = tunedMatchers.get(lambdaP);
    if (held !== undefined) return held;
    const tuned = retune(waves, lambdaP);
    const validThere = validTemperatures(model, tuned, geometry);
    const rangeThere = "reason" in validThere ? null : intersect(oven, validThere.range);
    const made = "reason" in validThere || rangeThere === null
      ? null
      : matcher(model, question, tuned, rangeThere, validThere.range, spectrumFor);
    tunedMatchers.set(lambdaP, made);
    return made;
  };
  return {
    at(offset) {
      const found = nominal(offset);
      // A fixed oven is searched just around its temperature, and stays at it.
      const within = (T: number) => Math.min(range[1], Math.max(range[0], T));
      if (found.roots.length > 0) return point(found, waves, false, within);
      const tuned = tunable === null
        ? null
        : nearestPump(waves.lambdaP, tunable, (l) => matcherAt(l)?.(offset) ?? null);
      if (tuned === null) {
        return { temperatureC: within(found.nearest), matched: false, others: [], waves, tuned: false };
      }
      return point(tuned.found, retune(waves, tuned.lambdaP), true, within);
    },
  };
}

/** Waves at another pump wavelength with ω_s/ω_p kept: all wavelengths scale alike. */
export function retune(waves: ThreeWaves, lambdaP: number): ThreeWaves {
  const ratio = lambdaP / waves.lambdaP;
  return { ...waves, lambdaP, lambdaS: waves.lambdaS * ratio, lambdaI: waves.lambdaI * ratio };
}

function point(
  found: Temperatures,
  waves: ThreeWaves,
  tuned: boolean,
  within: (T: number) => number,
): OperatingPoint {
  return { temperatureC: within(found.roots[0]!), matched: true, others: found.roots.slice(1), waves, tuned };
}

/** Temperatures, and on which side of the grating vector |Δβ| lies where nothing matches (the sign at `nearest`). */
interface Match extends Temperatures {
  readonly side: number;
}
type Matcher = (offset: number) => Match;

function matcher(
  model: PlatformModel,
  question: OperatingQuestion,
  waves: ThreeWaves,
  range: readonly [number, number],
  valid: readonly [number, number],
  spectrumFor: (low: number, high: number) => GratingSpectrum | null,
): Matcher {
  const bare = mismatchOverTemperature(model.index, waves, question.geometry);
  const { period } = question;
  const withSide = (found: Temperatures, offset: number): Match => {
    const scaled = Math.abs(bare(found.nearest) + offset) * model.expansion(found.nearest);
    return { ...found, side: Math.sign(scaled - 2 * Math.PI / period) };
  };
  // A fixed temperature is an oven too: either it matches there or nothing does; searched just around it.
  const search = range[0] < range[1]
    ? range
    : [Math.max(valid[0], range[0] - 1e-3), Math.min(valid[1], range[0] + 1e-3)] as const;
  if (question.walls === null) {
    const vector = (T: number) => 2 * Math.PI / (period * model.expansion(T));
    return (offset) => withSide(phaseMatchingTemperatures((T) => bare(T) + offset, vector, search), offset);
  }
  return (offset) => {
    const u = (T: number) => (bare(T) + offset) * model.expansion(T);
    // u is monotonic in T or nearly: a coarse scan bounds it, and the band for the peak has a margin of 2 %.
    let low = Infinity;
    let high = -Infinity;
    for (let k = 0; k <= 16; k++) {
      const value = u(search[0] + (search[1] - search[0]) * k / 16);
      low = Math.min(low, value);
      high = Math.max(high, value);
    }
    const spectrum = spectrumFor(low, high);
    return withSide(peakTemperatures(spectrum!, u, search), offset);
  };
}

/** One spectrum over scaled Δβ serves all temperatures and offsets; it is made again only when the range outgrows it. */
function peakSpectrum(question: OperatingQuestion): (low: number, high: number) => GratingSpectrum | null {
  const { walls, period, poledLength, profile } = question;
  let held: { low: number; high: number; spectrum: GratingSpectrum } | null = null;
  return (low, high) => {
    if (walls === null) return null;
    if (held !== null && held.low <= low && held.high >= high) return held.spectrum;
    const margin = 0.05 * (high - low) + 1e-3 * Math.abs(high);
    const wide = { low: low - margin, high: high + margin };
    const spectrum = gratingSpectrum(
      walls,
      bandForPeak(wide.low, wide.high, period, walls.end - walls.start),
      { poledLength, ...(profile === undefined ? {} : { profile }) },
    );
    held = { ...wide, spectrum };
    return spectrum;
  };
}

/**
 * The pump wavelength nearest to nominal at which something matches: scanned outwards, then bisected. An oven of a small
 * range matches over a stretch shorter than the steps: there |Δβ| changes sides from one step to the next.
 */
function nearestPump(
  nominal: number,
  [low, high]: readonly [number, number],
  match: (lambdaP: number) => Match | null,
): { lambdaP: number; found: Temperatures } | null {
  let best: { lambdaP: number; found: Temperatures } | null = null;
  for (const end of [low, high]) {
    // A nominal wavelength outside the tunable range is approached from the nearer end inwards.
    const start = Math.min(high, Math.max(low, nominal));
    let before: { lambdaP: number; side: number } | null = null;
    for (let k = 0; k <= PUMP_STEPS; k++) {
      const lambdaP = start + (end - start) * k / PUMP_STEPS;
      const here = match(lambdaP);
      if (here === null) continue;
      const found = here.roots.length > 0 ? { lambdaP, found: here } : null;
      const crossed = before !== null && here.side !== before.side;
      const first = found === null && !crossed
        ? null
        : before === null
        ? found
        : firstMatch(before.lambdaP, before.side, lambdaP, found, match);
      if (first !== null) {
        if (best === null || Math.abs(first.lambdaP - nominal) < Math.abs(best.lambdaP - nominal)) {
          best = first;
        }
        break;
      }
      before = { lambdaP, side: here.side };
    }
  }
  return best;
}

/** The first wavelength beyond `outside` that matches, by bisection; `found` is what matches at `inside`, if anything. */
function firstMatch(
  outside: number,
  side: number,
  inside: number,
  found: { lambdaP: number; found: Temperatures } | null,
  match: (lambdaP: number) => Match | null,
): { lambdaP: number; found: Temperatures } | null {
  let best = found;
  while (Math.abs(inside - outside) > PUMP_TOLERANCE) {
    const middle = (inside + outside) / 2;
    const there = match(middle);
    if (there !== null && there.roots.length > 0) {
      inside = middle;
      best = { lambdaP: middle, found: there };
    } else if (there === null || there.side === side) outside = middle;
    else inside = middle;
  }
  return best;
}

function intersect(
  a: readonly [number, number],
  b: readonly [number, number],
): readonly [number, number] | null {
  const low = Math.max(a[0], b[0]);
  const high = Math.min(a[1], b[1]);
  return low <= high ? [low, high] : null;
}
