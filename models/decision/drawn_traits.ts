// Pure: no I/O, no clock, no hidden randomness.
import type { GeometryParameter } from "../guides/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import { dbPerCm } from "../../shared/units.ts";
import type { Basis } from "../../shared/vocabulary.ts";
import { type Bounds, DEFAULT_SAMPLE, drawTrait, nestedStrata, type SampleSize } from "./draws.ts";
import type { Role } from "./figure_basis.ts";
import type { ArmTraits, GuideInputs, UsedTrait } from "./guide_inputs.ts";
import { addErrors, type DrawnError, narrowed, otherScanTrait, type ToldErrors } from "./other_scan.ts";

/** Draws of everything uncertain in one guide; index k of every array belongs to draw k. */
export interface DrawnTraits {
  readonly size: SampleSize;
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
  /** The offset where every trait is at its mean, 1/m. */
  readonly nominalOffset: number;
  /** Standard deviation of δβ along the guide, 1/m; null where none is known. */
  readonly mismatchSd: Float64Array | null;
  /** The length (mm) and the share of the peak that a scan found; null without one. */
  readonly scanShape: { readonly effectiveLength: Float64Array; readonly peakKept: Float64Array } | null;
  /** The same draws trait by trait, for whoever asks which trait a figure follows. */
  readonly columns: readonly TraitColumn[];
}

/** Draws of one trait in its own unit (that of its name). Roles that share a key share one column. */
export interface TraitColumn {
  readonly key: string;
  /** `loss_db_cm`, `duty` …; with the roles it says what was drawn. */
  readonly trait: string;
  readonly roles: readonly Role[];
  readonly value: number;
  readonly u: number;
  readonly basis: Basis;
  /** All equal where u is 0, or where nothing depends on the trait. Columns are independent of each other. */
  readonly draws: Float64Array;
  /** What a reading of the trait would find, where a scan of another process tells of it; else left out: `draws`. */
  readonly narrowed?: Float64Array;
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
/** A grating of a few periods: keeps a wide error off zero. */
const LENGTH: Bounds = { low: 0.1 };
/** Outside this range a grating is no grating; a drawn duty stays inside. */
const DUTY: Bounds = { low: 0.02, high: 0.98 };

/**
 * Draws the traits of a guide. The seed is the guide's id and the trait's key, so a draw does not depend on the order of
 * guides, and one reading used twice (a second harmonic's signal and idler) is drawn once.
 * @param told what a scan of another process tells of the errors of the cross-section
 */
export function drawTraits(
  guide: GuideInputs,
  sensitivity: MismatchSensitivity = () => 0,
  size: SampleSize = DEFAULT_SAMPLE,
  bend: MismatchBend = () => 0,
  told: ToldErrors | null = null,
): DrawnTraits {
  const { draws, spectral } = size;
  const held = new Map<string, Float64Array>();
  const strataOf = (key: string): Float64Array => {
    let strata = held.get(key);
    if (strata === undefined) {
      held.set(key, strata = nestedStrata(draws, spectral, randomFrom(`${guide.id}|${key}`)));
    }
    return strata;
  };
  // One reading shares its probabilities, not its values: a mode size is scaled to the wavelength of each arm.
  const columns = new Map<string, TraitColumn>();
  const noted = (role: Role, name: string, trait: UsedTrait, values: Float64Array): Float64Array => {
    const held = columns.get(trait.key);
    const { key, value, u, basis } = trait;
    columns.set(
      key,
      held === undefined
        ? { key, trait: name, roles: [role], value, u, basis, draws: values }
        : { ...held, roles: held.roles.includes(role) ? held.roles : [...held.roles, role] },
    );
    return values;
  };
  const draw = (role: Role, name: string, trait: UsedTrait, bounds: Bounds): Float64Array =>
    noted(
      role,
      name,
      trait,
      drawTrait(trait, bounds, trait.u === 0 ? new Float64Array(draws) : strataOf(trait.key)),
    );
  const loss = (role: Role, trait: UsedTrait) => draw(role, "loss_db_cm", trait, NOT_NEGATIVE).map(dbPerCm);
  const arm = (name: "signal" | "idler", { mode, facet }: ArmTraits): DrawnArm => ({
    modeX: "reason" in mode ? null : draw(`${name}_mode`, "mfd_x_um", mode.x, SIZE),
    modeY: "reason" in mode ? null : draw(`${name}_mode`, "mfd_y_um", mode.y, SIZE),
    reflectivity: facet.state === "bare"
      ? null
      : draw(`${name}_facet`, "reflectivity", facet.reflectivity, SHARE),
  });
  const none = () => new Float64Array(draws);
  const { poling, mismatchSpread: spread = null } = guide;
  const scanned = spread?.scanned ?? null;
  const drawn = {
    size,
    lossP: loss("pump_loss", guide.pumpLoss),
    lossS: loss("signal_loss", guide.signal.loss),
    lossI: loss("idler_loss", guide.idler.loss),
    signal: arm("signal", guide.signal),
    idler: arm("idler", guide.idler),
    duty: poling.from === "walls" || poling.duty === undefined
      ? none()
      : draw("poling", "duty", poling.duty, DUTY),
    dutySd: poling.from === "duty" ? draw("poling", "duty_sd", poling.dutySd, NOT_NEGATIVE) : none(),
    merged: poling.from === "duty" ? draw("poling", "merged", poling.merged, SHARE) : none(),
    ...drawOffset(),
    mismatchSd: spread === null
      ? null
      // Realisations of a scanned guide take the draw that suits the scan: no column, for draw k is not that of realisation k.
      : scanned !== null
      ? drawTrait(spread.sd, NOT_NEGATIVE, strataOf(spread.sd.key))
      : draw("poling", "mismatch_sd_per_m", spread.sd, NOT_NEGATIVE),
    scanShape: scanned === null ? null : {
      effectiveLength: draw("poling", "effective_length_mm", scanned.effectiveLength, LENGTH),
      peakKept: draw("poling", "peak_kept", scanned.peakKept, SHARE),
    },
  };
  return { ...drawn, columns: [...columns.values()] };

  /** Offset of Δβ: a scan's, and what the errors of the geometry make of it, to second order. */
  function drawOffset(): Pick<DrawnTraits, "offset" | "nominalOffset"> {
    const role = "phase_matching";
    const slopes = { slope: sensitivity, bend };
    const offset = guide.offset === null
      ? none()
      : Float64Array.from(draw(role, "mismatch_offset_per_m", guide.offset, {}));
    const nominal = Float64Array.of(guide.offset?.value ?? 0);
    const errors: (DrawnError & { trait: UsedTrait })[] = [];
    for (const { parameter, trait } of guide.geometryErrors) {
      const felt = trait.u > 0 && (sensitivity(parameter) !== 0 || (told?.weight(parameter) ?? 0) !== 0);
      const name = parameter === "width_um" ? "width_error_um" : parameter;
      if (!felt) noted(role, name, trait, new Float64Array(draws).fill(trait.value));
      else {
        const off = draw(role, name, trait, {}).map((x) => x - trait.value);
        errors.push({ parameter, u: trait.u, off, trait });
      }
    }
    if (told === null) {
      addErrors(offset, errors, slopes);
      return { offset, nominalOffset: nominal[0]! };
    }
    const rest = draw(role, otherScanTrait(told.scan.waves), told.rest, {}).map((x) => x - told.rest.value);
    const left = narrowed(told, errors, rest);
    addErrors(offset, left, slopes);
    left.forEach(({ off }, i) => {
      const { key, value } = errors[i]!.trait;
      columns.set(key, { ...columns.get(key)!, narrowed: off.map((d) => value + d) });
    });
    const means = errors.map((e) => ({ ...e, off: Float64Array.of(told.gain(e.parameter) * told.surprise) }));
    addErrors(nominal, means, slopes);
    return { offset, nominalOffset: nominal[0]! };
  }
}

/** ∂Δβ/∂parameter, 1/m per unit of the parameter's own name. */
export type MismatchSensitivity = (parameter: GeometryParameter) => number;

/** ∂²Δβ/∂a∂b, 1/m per product of the units of two parameters' names; found over their standard uncertainties. */
export type MismatchBend = (a: UncertainParameter, b: UncertainParameter) => number;
export interface UncertainParameter {
  readonly parameter: GeometryParameter;
  readonly u: number;
}
