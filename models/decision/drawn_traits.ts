// Pure: no I/O, no clock, no hidden randomness.
import { randomFrom } from "../../shared/random.ts";
import { dbPerCm } from "../../shared/units.ts";
import { type Bounds, DRAWS, drawTrait, nestedStrata, SPECTRAL_DRAWS } from "./draws.ts";
import type { ArmTraits, GuideInputs, UsedTrait } from "./guide_inputs.ts";

/** Draws of everything uncertain in one guide; index k of every array belongs to draw k. */
export interface DrawnTraits {
  /** Power attenuations, 1/m. */
  readonly lossP: Float64Array;
  readonly lossS: Float64Array;
  readonly lossI: Float64Array;
  readonly signal: DrawnArm;
  readonly idler: DrawnArm;
  readonly duty: Float64Array;
  readonly dutySd: Float64Array;
  readonly merged: Float64Array;
  /** Offset of Δβ, 1/m. */
  readonly offset: Float64Array;
}

export interface DrawnArm {
  /** Mode-field diameters, µm; null when unknown. */
  readonly modeX: Float64Array | null;
  readonly modeY: Float64Array | null;
  /** Reflectivity of a coated output facet; null for a bare one. */
  readonly reflectivity: Float64Array | null;
}

const NOT_NEGATIVE: Bounds = { low: 0 };
const SHARE: Bounds = { low: 0, high: 1 };
/** A mode can't be smaller than a fraction of a wavelength; 0.1 µm keeps a wide prior off zero. */
const SIZE: Bounds = { low: 0.1 };
/** Outside this range a grating is no grating; a drawn duty stays inside. */
const DUTY: Bounds = { low: 0.02, high: 0.98 };

/**
 * Draws the traits of a guide. The seed is the guide's id and the trait's key, so a draw does not depend on the order of
 * guides, and one reading used twice (a second harmonic's signal and idler) is drawn once.
 */
export function drawTraits(guide: GuideInputs): DrawnTraits {
  const held = new Map<string, Float64Array>();
  const draw = (trait: UsedTrait, bounds: Bounds): Float64Array => {
    const before = held.get(trait.key);
    if (before !== undefined) return before;
    const strata = trait.u === 0
      ? new Float64Array(DRAWS)
      : nestedStrata(DRAWS, SPECTRAL_DRAWS, randomFrom(`${guide.id}|${trait.key}`));
    const drawn = drawTrait(trait, bounds, strata);
    held.set(trait.key, drawn);
    return drawn;
  };
  const loss = (trait: UsedTrait) => draw(trait, NOT_NEGATIVE).map(dbPerCm);
  const arm = ({ mode, facet }: ArmTraits): DrawnArm => ({
    modeX: "reason" in mode ? null : draw(mode.x, SIZE),
    modeY: "reason" in mode ? null : draw(mode.y, SIZE),
    reflectivity: facet.state === "bare" ? null : draw(facet.reflectivity, SHARE),
  });
  const none = () => new Float64Array(DRAWS);
  const { poling } = guide;
  return {
    lossP: loss(guide.pumpLoss),
    lossS: loss(guide.signal.loss),
    lossI: loss(guide.idler.loss),
    signal: arm(guide.signal),
    idler: arm(guide.idler),
    duty: poling.from === "duty" ? draw(poling.duty, DUTY) : none(),
    dutySd: poling.from === "duty" ? draw(poling.dutySd, NOT_NEGATIVE) : none(),
    merged: poling.from === "duty" ? draw(poling.merged, SHARE) : none(),
    offset: guide.offset === null ? none() : draw(guide.offset, {}),
  };
}
