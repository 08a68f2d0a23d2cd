// Pure: no I/O, no clock, no hidden randomness.

/** Yields (0…1, or probabilities of one guide) with traits set to their targets in the model. */
export interface RestoredYields {
  readonly asMade: number;
  /** With every trait of the list at its target. */
  readonly allAtTarget: number;
  /** With one trait at its target and the others as made. */
  readonly oneAtTarget: readonly { readonly trait: string; readonly yield: number }[];
}

export interface RestoreOne {
  readonly asMade: number;
  readonly allAtTarget: number;
  /** Largest rise first, ties in the order given. */
  readonly traits: readonly RestoredTrait[];
  /**
   * What the single rises leave of the whole one: above 0 traits hold each other back (both have to be put right), below
   * 0 either of several would do.
   */
  readonly interaction: number;
  /** The same as a share of the whole rise; null when the whole rise is 0. */
  readonly interactionShare: number | null;
}

export interface RestoredTrait {
  readonly trait: string;
  readonly yield: number;
  /** Yield gained, in the unit of the yields; below 0 when the target makes things worse. */
  readonly rise: number;
  /** Share of the whole rise; null when the whole rise is 0. The shares and the interaction's sum to 1. */
  readonly share: number | null;
}

/** A whole rise below this is rounding. */
const LEAST_RISE = 1e-12;

/** Rise of the yield trait by trait beside the rise with all of them at target. @throws RangeError for a yield outside 0…1 */
export function restoreOne({ asMade, allAtTarget, oneAtTarget }: RestoredYields): RestoreOne {
  for (const y of [asMade, allAtTarget, ...oneAtTarget.map((o) => o.yield)]) {
    if (!(y >= 0 && y <= 1)) throw new RangeError(`Cannot compare yields: found ${y}, need 0…1`);
  }
  const whole = allAtTarget - asMade;
  const shareOf = (rise: number) => Math.abs(whole) < LEAST_RISE ? null : rise / whole;
  const traits = oneAtTarget
    .map(({ trait, yield: restored }) => {
      const rise = restored - asMade;
      return { trait, yield: restored, rise, share: shareOf(rise) };
    })
    .sort((a, b) => b.rise - a.rise);
  const interaction = whole - traits.reduce((sum, t) => sum + t.rise, 0);
  return { asMade, allAtTarget, traits, interaction, interactionShare: shareOf(interaction) };
}
