// Pure: no I/O, no clock, no hidden randomness.
import { bareReflectivity, fringeLoss, isRefused } from "../metrology/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { dbPerCm, toDbPerCm } from "../../shared/units.ts";
import type { TraitColumn } from "./drawn_traits.ts";
import type { Role } from "./figure_basis.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import type { PlatformModel } from "./platform_model.ts";

/** Standard uncertainty that a reading of a trait would have, and what it is taken from. */
export interface ReadingU {
  readonly u: number;
  readonly from: string;
}

/** By trait (`loss_db_cm`, `duty` …) what readings of the lot, or the platform's defaults, say of their uncertainty. */
export interface KnownReadingU {
  readonly byTrait: Readonly<Record<string, ReadingU>>;
  /** The platform's uncertainty of a fringe contrast; null where it states none. */
  readonly contrast: number | null;
}

/** A reading that could still be taken on a guide: what it reads, and how well. */
export interface PossibleReading {
  readonly kind: "fringes" | "modes" | "facets" | "poling" | "tuning" | "geometry";
  readonly reads: readonly {
    /** Key of the drawn trait. */
    readonly key: string;
    readonly trait: string;
    readonly roles: readonly Role[];
    readonly u: number;
    readonly from: string;
  }[];
}

/** The sum of a scan's offset and of what the cross-section's errors make of Δβ: what a tuning scan reads. */
export const WHOLE_OFFSET = "whole mismatch offset";

/** Length of a poling window and share of the line width that a scan finds its peak to: common practice, no source. */
const WINDOW_LENGTH = 1e-3;
const PEAK_SHARE = 0.05;
/** FWHM of sinc² in Δβ·L. */
const LINE_WIDTH = 5.566;

const KINDS: Readonly<Record<string, PossibleReading["kind"]>> = {
  loss_db_cm: "fringes",
  mfd_x_um: "modes",
  mfd_y_um: "modes",
  reflectivity: "facets",
  duty: "poling",
  duty_sd: "poling",
  merged: "poling",
  mismatch_sd_per_m: "tuning",
  width_error_um: "geometry",
  film_thickness_nm: "geometry",
  etch_depth_nm: "geometry",
  titanium_nm: "geometry",
};

/**
 * Readings that could still be taken: of every drawn trait that is uncertain and was not read on the guide itself. Loss by
 * fringes, since a cut-back takes the die away. A coating that was witnessed is not witnessed again; a grating known by walls
 * or windows has no drawn trait, and no reading is offered for it.
 */
export function possibleReadings(
  model: PlatformModel,
  { waves }: CheckedRequest,
  guide: GuideInputs,
  columns: readonly TraitColumn[],
  known: KnownReadingU,
): PossibleReading[] {
  const groups = new Map<
    string,
    { kind: PossibleReading["kind"]; reads: PossibleReading["reads"][number][] }
  >();
  const offer = (name: string, kind: PossibleReading["kind"], read: PossibleReading["reads"][number]) => {
    const held = groups.get(name);
    if (held === undefined) groups.set(name, { kind, reads: [read] });
    else held.reads.push(read);
  };
  for (const { key, trait, roles, u, basis } of columns) {
    const kind = KINDS[trait];
    const done = trait === "reflectivity" ? basis !== "platform" : basis === "measured";
    if (kind === undefined || u === 0 || done) continue;
    const found = known.byTrait[trait] ?? derived(trait, roles);
    if (found === null) continue;
    // One picture shows a mode both ways, one window all of a grating, one scan its centre and width.
    const name = kind === "modes"
      ? `modes ${roles.join()}`
      : kind === "poling" || kind === "tuning"
      ? kind
      : key;
    offer(name, kind, { key, trait, roles, ...found });
  }
  const scanned = guide.offset?.basis === "measured";
  if (!scanned && columns.some((c) => c.u > 0 && c.roles.includes("phase_matching"))) {
    const trait = "mismatch_offset_per_m";
    const found = known.byTrait[trait] ?? {
      u: PEAK_SHARE * LINE_WIDTH / guide.poledLength,
      from: "a twentieth of the line width",
    };
    offer("tuning", "tuning", { key: WHOLE_OFFSET, trait, roles: ["phase_matching"], ...found });
  }
  return [...groups.values()];

  /** Where neither the lot nor the platform says: from the way in which the reading is made. */
  function derived(trait: string, roles: readonly Role[]): ReadingU | null {
    const { poling } = guide;
    const domains = WINDOW_LENGTH / guide.period;
    const window = `counting one window of ${WINDOW_LENGTH * 1e3} mm`;
    if (trait === "loss_db_cm" && known.contrast !== null) return fringes(roles, known.contrast);
    if (poling.from !== "duty") return null;
    const { value: sd } = poling.dutySd;
    const { value: merged } = poling.merged;
    switch (trait) {
      case "duty":
        return { u: sd / Math.sqrt(domains), from: window };
      case "duty_sd":
        return { u: sd / Math.sqrt(2 * domains), from: window };
      case "merged":
        // A share of which none is counted is still not known better than one in all.
        return { u: Math.sqrt(Math.max(merged * (1 - merged), 1 / domains) / domains), from: window };
      default:
        return null;
    }
  }

  /** Contrast between bare facets at the loss that the guide is thought to have. */
  function fringes(roles: readonly Role[], u: number): ReadingU | null {
    const [lambda, pol, loss] = roles.includes("signal_loss")
      ? [waves.lambdaS, waves.polS, guide.signal.loss]
      : roles.includes("idler_loss")
      ? [waves.lambdaI, waves.polI, guide.idler.loss]
      : [waves.lambdaP, waves.polP, guide.pumpLoss];
    let n: number;
    try {
      n = model.index.nEff(pol, lambda, 25, guide.geometry);
    } catch (error) {
      if (error instanceof RangeError) return null;
      throw error;
    }
    const R = bareReflectivity({ value: n, u: 0 }, model.outsideIndex).value;
    const r = R * Math.exp(-dbPerCm(Math.max(0, loss.value)) * guide.length);
    const read = fringeLoss({ value: 2 * r / (1 + r * r), u }, { value: R, u: 0 }, {
      value: guide.length,
      u: 0,
    });
    if (isRefused(read)) return null;
    return { u: toDbPerCm(read.alpha.u), from: "the platform's u_contrast between bare facets" };
  }
}
