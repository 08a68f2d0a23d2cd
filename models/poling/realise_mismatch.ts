// Pure: no I/O, no clock, no hidden randomness.
import type { Random } from "../../shared/random.ts";
import type { MismatchProfile } from "./profile.ts";

/** A stationary normal δβ(z) with covariance sd²·e^(−|Δz|/ℓ) over a section of a guide. */
export interface MismatchStatistics {
  /** Section, m from the input facet. */
  readonly start: number;
  readonly length: number;
  /** Standard deviation of δβ, 1/m. */
  readonly sd: number;
  /** ℓ, m. */
  readonly correlationLength: number;
}

/** Knots per correlation length at least: straight lines between knots keep Var θ to (h/ℓ)²/12 = 0.5 %. */
const PER_LENGTH = 4;
/** A section of more knots than this is not what the statistics are about. */
const MOST_STEPS = 4096;

/**
 * Into how many equal steps a section is cut for a realisation.
 * @throws RangeError for a length that is not positive, or a section of more than a thousand correlation lengths
 */
export function mismatchSteps(length: number, correlationLength: number): number {
  const steps = Math.max(4, Math.ceil(PER_LENGTH * length / correlationLength));
  if (!(length > 0 && correlationLength > 0 && steps <= MOST_STEPS)) {
    throw new RangeError(
      `Cannot realise a mismatch over ${length} m with a correlation of ${correlationLength} m: need both > 0 and at most ${
        MOST_STEPS / PER_LENGTH
      } correlation lengths`,
    );
  }
  return steps;
}

/**
 * One realisation: the exact first-order autoregressive sequence of an Ornstein–Uhlenbeck process (G. E. Uhlenbeck & L. S.
 * Ornstein, Phys. Rev. 36, 823 (1930)), δ_{k+1} = ρδ_k + √(1−ρ²)·sd·ξ with ρ = e^(−h/ℓ), at knots h apart, linear in between.
 * Realisations of one seed differ by their sd alone.
 * @throws RangeError for a negative sd, or a section that {@link mismatchSteps} refuses
 */
export function realiseMismatch(of: MismatchStatistics, random: Random): MismatchProfile {
  const { start, length, sd, correlationLength } = of;
  if (!(sd >= 0 && sd < Infinity)) {
    throw new RangeError(
      `Cannot realise a mismatch: found a standard deviation of ${sd} 1/m, need a finite one >= 0`,
    );
  }
  const steps = mismatchSteps(length, correlationLength);
  const keep = Math.exp(-length / steps / correlationLength);
  const fresh = Math.sqrt(1 - keep * keep);
  const z = new Float64Array(steps + 1);
  const delta = new Float64Array(steps + 1);
  let unit = random.normal();
  for (let k = 0; k <= steps; k++) {
    z[k] = start + length * k / steps;
    delta[k] = sd * unit;
    unit = keep * unit + fresh * random.normal();
  }
  return { z, delta };
}

/** θ (rad) in the middle of every step of a profile with evenly spaced knots, counted from its first knot. */
export function stepPhases({ z, delta }: MismatchProfile): Float64Array {
  const theta = new Float64Array(z.length - 1);
  let sum = 0;
  for (let k = 0; k < theta.length; k++) {
    const h = z[k + 1]! - z[k]!;
    theta[k] = sum + h * (3 * delta[k]! + delta[k + 1]!) / 8;
    sum += h * (delta[k]! + delta[k + 1]!) / 2;
  }
  return theta;
}

/** Two profiles on top of each other, with the knots of both; `shift` (1/m) is added everywhere. */
export function addProfiles(a: MismatchProfile, b: MismatchProfile | undefined, shift = 0): MismatchProfile {
  if (b === undefined) return { z: a.z, delta: a.delta.map((d) => d + shift) };
  const z = Float64Array.from(new Set([...a.z, ...b.z])).sort();
  const [one, other] = [walker(a), walker(b)];
  return { z, delta: z.map((x) => one(x) + other(x) + shift) };
}

/** Values of a profile at ascending z. */
function walker({ z, delta }: MismatchProfile): (x: number) => number {
  let k = 0;
  const last = z.length - 1;
  return (x) => {
    while (k < last && z[k + 1]! <= x) k++;
    if (x <= z[0]!) return delta[0]!;
    if (k === last) return delta[last]!;
    return delta[k]! + (delta[k + 1]! - delta[k]!) * (x - z[k]!) / (z[k + 1]! - z[k]!);
  };
}
