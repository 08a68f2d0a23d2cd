// Pure: no I/O, no clock, no hidden randomness.
import {
  addProfiles,
  type EnvelopeCurve,
  envelopeCurves,
  type Grating,
  gratingEnvelope,
  type MismatchProfile,
  mismatchSteps,
  realiseMismatch,
  SINC_SQUARED_WIDTH,
  stepPhases,
} from "../poling/mod.ts";
import type { GeometryParameter } from "../guides/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import type { ThreeWaves } from "../../shared/vocabulary.ts";
import type { DrawnTraits, MismatchSensitivity } from "./drawn_traits.ts";
import type { GuideInputs, SpreadTraits } from "./guide_inputs.ts";
import { type Site, siteMismatch } from "./site.ts";

/** What one spectral draw converts with: a grating, and what Δβ does along it. */
export interface MadeGrating {
  readonly grating: Grating;
  readonly profile: MismatchProfile | undefined;
}

/** A scan speaks for the same three polarisations this near in wavelength, as its offset does. */
const WITHIN = 0.05;
/** More than this factor between two processes is no error of the cross-section that a scan could have told. */
const LARGEST_FACTOR = 10;

/**
 * δβ of the asked process over that of the process a spread was told of. Both follow the same error δq(z) of the
 * cross-section: δβ_a = S_a·δq and δβ_b = S_b·δq, S = ∂Δβ/∂q, so the factor is |S_a/S_b|. Which q it is nobody measured: it is
 * taken to be the parameter whose stated uncertainty moves the told process most, the width where none is stated.
 * @returns 1 for the same process within ±5 %; null where no error of the cross-section would explain what was told
 */
export function spreadFactor(
  asked: ThreeWaves,
  { scanned }: SpreadTraits,
  { geometryErrors }: Pick<GuideInputs, "geometryErrors">,
  sensitivityOf: (waves: ThreeWaves) => MismatchSensitivity,
): { readonly factor: number; readonly by: GeometryParameter | null } | null {
  if (scanned === null) return { factor: 1, by: null };
  const { waves } = scanned;
  const inputs = ({ polS, polI }: ThreeWaves) => [polS, polI].sort().join("+");
  const same = waves.polP === asked.polP && inputs(waves) === inputs(asked);
  if (same && Math.abs(waves.lambdaP / asked.lambdaP - 1) <= WITHIN) return { factor: 1, by: null };
  const [own, told] = [sensitivityOf(asked), sensitivityOf(waves)];
  const stated = geometryErrors.filter((e) => e.trait.u > 0).map((e) => ({
    parameter: e.parameter,
    moves: Math.abs(told(e.parameter)) * e.trait.u,
  }));
  const by = stated.length === 0 ? "width_um" : stated.reduce((a, b) => b.moves > a.moves ? b : a).parameter;
  const factor = Math.abs(own(by) / told(by));
  return factor <= LARGEST_FACTOR ? { factor, by } : null;
}

/** Realisations tried for one draw of a scanned guide: one in fifty to a hundred is like a broadened curve. */
const TRIES = 128;
/** A realisation is like a draw within so much in width (relative) and in the peak kept, or within half their uncertainty. */
const ALIKE = 0.01;

/**
 * The gratings of the spectral draws, each with a realisation of the spread on it. A guide whose own scan told the spread has
 * its curve's width and the height that its shape tells: of many pairs of a drawn σ and a realisation such a draw takes the first
 * that is as wide and as high as drawn (J. K. Pritchard et al., Mol. Biol. Evol. 16, 1791 (1999), for such sampling), so that
 * every process on the guide feels the length that the scan found, and a σ that hardly makes such curves hardly counts.
 *
 * Every draw re-tunes the oven to its peak, and a scan's centre is that of its peak: each realisation is shifted by a constant so
 * that the main peak of |φ|² stays where it was without it. Taking the mean of δβ off would leave the peak off the operating
 * point by a share of the line width, and count as lost what re-tuning gets back.
 * @param factor of the asked process over that of which the spread was told
 */
export function withSpread(
  site: Site,
  gratings: readonly Grating[],
  { mismatchSd, scanShape, size }: DrawnTraits,
  factor: number,
): MadeGrating[] {
  const { guide, scale, profile: known } = site;
  const spread = guide.mismatchSpread;
  if (!spread || mismatchSd === null) return gratings.map((grating) => ({ grating, profile: known }));
  const { correlationLength, scanned } = spread;
  const scaled = siteMismatch(site, site.waves) * scale;
  const curvesOf = new Map<Grating, ReturnType<typeof envelopeCurves>>();
  return Array.from({ length: size.spectral }, (_, k) => {
    const grating = gratings[k % gratings.length]!;
    const at = { start: grating.start, length: grating.end - grating.start, correlationLength };
    let curves = curvesOf.get(grating);
    if (curves === undefined) {
      const envelope = gratingEnvelope(grating, scaled, mismatchSteps(at.length, correlationLength), {
        poledLength: guide.poledLength,
        ...(known === undefined ? {} : { profile: known }),
      });
      curvesOf.set(grating, curves = envelopeCurves(envelope));
    }
    const off = scanShape === null || scanned === null ? null : distance({
      width: SINC_SQUARED_WIDTH / (scanShape.effectiveLength[k]! * 1e-3),
      nearWidth: Math.max(ALIKE, scanned.effectiveLength.u / scanned.effectiveLength.value / 2),
      power: scanShape.peakKept[k]! * curves().peak.power,
      nearPower: Math.max(ALIKE, scanned.peakKept.u / 2) * curves().peak.power,
    });
    let best: { profile: MismatchProfile; off: number } | null = null;
    for (let n = 0; n < (off === null ? 1 : TRIES); n++) {
      const random = randomFrom(`${guide.id}|${spread.sd.key}|${k}|${n}`);
      const sd = mismatchSd[(k + n * size.spectral) % size.draws]!;
      const profile = realiseMismatch({ ...at, sd }, random);
      const far = off === null ? 0 : off(curves(stepPhases(profile)));
      if (best === null || far < best.off) best = { profile, off: far };
      if (far <= 1) break;
    }
    const { z, delta } = best!.profile;
    const made = { z, delta: delta.map((d) => factor * d) };
    const shift = curves(stepPhases(made)).peak.at - curves().peak.at;
    // δβ acts along z as it is, while the envelope counts z at 25 °C: the shift there is scale times that of Δβ.
    return { grating, profile: addProfiles(made, known, shift / scale) };
  });
}

/** How far a curve is from what it should be like; 1 is near enough. */
function distance(
  want: {
    readonly width: number;
    readonly nearWidth: number;
    readonly power: number;
    readonly nearPower: number;
  },
): (curve: EnvelopeCurve) => number {
  return ({ width, peak }) =>
    width === null ? Infinity : Math.hypot(
      (width / want.width - 1) / want.nearWidth,
      (peak.power - want.power) / want.nearPower,
    );
}
