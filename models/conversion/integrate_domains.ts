// Pure: no I/O, no clock, no hidden randomness.
import { checkGrating, type Grating } from "../poling/grating.ts";
import { checkProfile, type MismatchProfile } from "../poling/profile.ts";
import { COUPLING_PER_STEP, PHASE_PER_STEP, ThreeWaveStepper } from "./_stepper.ts";
import { type LitGuide, omegas, requireLitGuide, type WaveValues } from "./three_waves.ts";

export interface DomainOptions {
  /** δβ(z) beside the constant mismatch. */
  readonly profile?: MismatchProfile;
  /** Thermal expansion: every z (walls, profile, guide) times this; default 1. */
  readonly scale?: number;
  /** Every step cut in this many: for showing that the result has settled; default 1. */
  readonly refine?: number;
}

/**
 * Powers at the output facet, W, by the coupled-mode equations over every domain of a real grating, with depletion of
 * all three waves and their loss. Outside the poled section the mismatch is far from resonance: loss alone.
 * Steps never cross a wall; each is short enough in phase and in coupling for 1e-12 of the photons.
 * @param deltaBeta β_p − β_s − β_i without a grating term, 1/m
 * @throws RangeError for an impossible guide, or a poled section that reaches outside it
 */
export function integrateDomains(
  guide: LitGuide,
  grating: Grating,
  deltaBeta: number,
  options: DomainOptions = {},
): WaveValues {
  requireLitGuide(guide);
  const { profile, scale = 1, refine = 1 } = options;
  if (!Number.isFinite(deltaBeta)) {
    throw new RangeError(`Cannot convert: found mismatch ${deltaBeta} 1/m, need a finite number`);
  }
  if (!(scale > 0 && scale < Infinity) || !Number.isSafeInteger(refine) || refine < 1) {
    throw new RangeError(
      `Cannot convert: found scale ${scale}, refine ${refine}, need scale > 0, whole refine >= 1`,
    );
  }
  checkGrating(grating);
  if (profile !== undefined) checkProfile(profile);
  const slack = 1e-9 * guide.guideLength; // a section may end on the facet to rounding
  if (!(grating.start >= -slack && grating.end <= guide.guideLength + slack)) {
    throw new RangeError(
      `Cannot convert: found a poled section from ${grating.start} to ${grating.end} m, need it inside 0 to ${guide.guideLength} m`,
    );
  }
  const { alpha, power } = guide;
  const omega = omegas(guide.waves);
  const stepper = new ThreeWaveStepper(alpha.p, alpha.s, alpha.i);
  // All real: with one wave empty no relative phase matters.
  stepper.state.set([
    Math.sqrt(power.p / omega.p),
    0,
    Math.sqrt(power.s / omega.s),
    0,
    Math.sqrt(power.i / omega.i),
    0,
  ]);

  stepper.decay(grating.start * scale);
  let phase = 0; // the phase at the section's start turns the made wave only
  for (const piece of pieces(grating, profile)) {
    const length = (piece.to - piece.from) * scale;
    const rate = deltaBeta + piece.deltaFrom;
    const curve = (piece.deltaTo - piece.deltaFrom) / length;
    const fastest = Math.max(Math.abs(rate), Math.abs(deltaBeta + piece.deltaTo));
    const strongest = guide.coupling * Math.sqrt(stepper.photons());
    const steps = refine *
      Math.max(1, Math.ceil(Math.max(fastest / PHASE_PER_STEP, strongest / COUPLING_PER_STEP) * length));
    const h = length / steps;
    for (let k = 0; k < steps; k++) {
      const x = k * h;
      const at = { phase: phase + x * (rate + curve * x / 2), rate: rate + curve * x, curve };
      stepper.step(h, guide.coupling * piece.sign, at);
    }
    phase += length * (rate + curve * length / 2);
  }
  stepper.decay((guide.guideLength - grating.end) * scale);

  const a = stepper.state;
  return {
    p: omega.p * (a[0]! ** 2 + a[1]! ** 2),
    s: omega.s * (a[2]! ** 2 + a[3]! ** 2),
    i: omega.i * (a[4]! ** 2 + a[5]! ** 2),
  };
}

interface Piece {
  readonly from: number;
  readonly to: number;
  readonly sign: number;
  readonly deltaFrom: number;
  readonly deltaTo: number;
}

/** The section cut at its walls and at the profile's knots: in each piece d is constant and δβ linear. */
function* pieces({ walls, start, end, firstSign }: Grating, profile?: MismatchProfile): Generator<Piece> {
  let sign: number = firstSign;
  let wall = 0;
  let knot = 0;
  let from = start;
  const knots = profile?.z ?? new Float64Array(0);
  while (knot < knots.length && knots[knot]! <= start) knot++;
  while (from < end) {
    const nextWall = wall < walls.length ? walls[wall]! : Infinity;
    const nextKnot = knot < knots.length ? knots[knot]! : Infinity;
    const to = Math.min(nextWall, nextKnot, end);
    if (to > from) {
      yield {
        from,
        to,
        sign,
        // The interval below `nextKnot`: `knot` counts the knots at or before `from`.
        deltaFrom: profile === undefined ? 0 : valueAt(profile, knot, from),
        deltaTo: profile === undefined ? 0 : valueAt(profile, knot, to),
      };
    }
    if (nextWall <= to) {
      sign = -sign;
      wall++;
    }
    if (nextKnot <= to) knot++;
    from = to;
  }
}

function valueAt({ z, delta }: MismatchProfile, above: number, at: number): number {
  if (above === 0) return delta[0]!;
  if (above === z.length) return delta[z.length - 1]!;
  const share = (at - z[above - 1]!) / (z[above]! - z[above - 1]!);
  return delta[above - 1]! + share * (delta[above]! - delta[above - 1]!);
}
