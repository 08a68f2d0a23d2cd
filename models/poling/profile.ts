// Pure: no I/O, no clock, no hidden randomness.

/**
 * Mismatch error along the guide: δβ (1/m) at ascending z (m from the input facet, at 25 °C), linear in between and
 * constant beyond both ends.
 */
export interface MismatchProfile {
  readonly z: Float64Array;
  readonly delta: Float64Array;
}

/** Throws a RangeError unless there is at least one knot, as many values, finite, z strictly ascending. */
export function checkProfile(profile: MismatchProfile): void {
  const { z, delta } = profile;
  if (z.length === 0 || z.length !== delta.length) {
    throw new RangeError(
      `Cannot use a mismatch profile of ${z.length} positions and ${delta.length} values: need as many, at least 1`,
    );
  }
  for (let k = 0; k < z.length; k++) {
    if (!Number.isFinite(z[k]!) || !Number.isFinite(delta[k]!) || (k > 0 && !(z[k]! > z[k - 1]!))) {
      throw new RangeError(
        `Cannot use a mismatch profile: knot ${k} is (${z[k]} m, ${delta[k]} 1/m), need finite, ascending z`,
      );
    }
  }
}

/** One linear piece of a profile in stretched coordinates: δβ(z) = delta + slope·(z − z0), θ(z0) = theta. */
export interface ProfilePiece {
  /** −∞ for the first piece; the piece ends where the next begins. */
  readonly from: number;
  readonly z0: number;
  readonly delta: number;
  readonly slope: number;
  readonly theta: number;
}

/**
 * The profile as pieces with the phase θ(z) = ∫₀^z δβ dz′ known on each; all z times `scale` (thermal expansion).
 * Without a profile: one piece of zeros.
 */
export function profilePieces(profile: MismatchProfile | undefined, scale: number): ProfilePiece[] {
  if (profile === undefined) return [{ from: -Infinity, z0: 0, delta: 0, slope: 0, theta: 0 }];
  const { z, delta } = profile;
  const last = z.length - 1;
  // θ counted from the first knot, then shifted so that θ(0) = 0.
  const raw: ProfilePiece[] = [
    { from: -Infinity, z0: z[0]! * scale, delta: delta[0]!, slope: 0, theta: 0 },
  ];
  let theta = 0;
  for (let k = 0; k < last; k++) {
    const width = (z[k + 1]! - z[k]!) * scale;
    const from = z[k]! * scale;
    raw.push({ from, z0: from, delta: delta[k]!, slope: (delta[k + 1]! - delta[k]!) / width, theta });
    theta += width * (delta[k]! + delta[k + 1]!) / 2;
  }
  raw.push({ from: z[last]! * scale, z0: z[last]! * scale, delta: delta[last]!, slope: 0, theta });
  let home = raw[0]!;
  for (const piece of raw) if (piece.from <= 0) home = piece;
  const origin = thetaOn(home, 0);
  return raw.map((piece) => ({ ...piece, theta: piece.theta - origin }));
}

/** δβ at z on its piece, 1/m. */
export const deltaOn = (piece: ProfilePiece, z: number): number => piece.delta + piece.slope * (z - piece.z0);

/** θ at z on its piece, rad. */
export function thetaOn(piece: ProfilePiece, z: number): number {
  const dz = z - piece.z0;
  return piece.theta + dz * (piece.delta + 0.5 * piece.slope * dz);
}
