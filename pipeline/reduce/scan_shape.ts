import { effectiveLength, isRefused, mismatchSpread, type TuningFit } from "../../models/metrology/mod.ts";
import { windowStatistics } from "../../models/decision/mod.ts";
import {
  type Grating,
  gratingEnvelope,
  type MismatchProfile,
  mismatchSteps,
  realiseGrating,
  uniformGrating,
} from "../../models/poling/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import { mm, um } from "../../shared/units.ts";
import type { GuideRecord } from "../records.ts";
import { windowOf, windowsAround, type WindowsByUnit } from "../traits/guide_traits.ts";
import { CORRELATION_LENGTH } from "../traits/mismatch_spread.ts";
import { type ReadingRef, refsOf, type TraitRow } from "../traits/trait_row.ts";

/** What is known of a scanned guide besides its scan. */
export interface KnownGuide {
  readonly guide: GuideRecord;
  /** Its complete walls, if there are any. */
  readonly walls: Grating | null;
  /** What its cross-section, as read along it, makes of Δβ. */
  readonly profile: MismatchProfile | undefined;
  /** Scaled Δβ at its peak, signed, 1/m. */
  readonly peak: number;
}

/**
 * Traits of a scan's shape: effective length, asymmetry, and the spread of δβ that is left when the guide's own grating
 * (walls, else its poling windows, else an ideal one) and its variation along z have had their share.
 * @param offsets of the points that the fit used from its centre, in scaled Δβ, 1/m
 * @param common the row's fields that all traits of the scan share
 */
export function shapeTraits(
  fit: TuningFit,
  offsets: Float64Array,
  known: KnownGuide,
  windows: WindowsByUnit,
  common: Omit<TraitRow, "trait" | "value" | "u">,
): TraitRow[] {
  const length = effectiveLength(fit.fwhm, 1);
  const rows: TraitRow[] = [
    { ...common, trait: "effective_length_mm", value: length.value * 1e3, u: length.u * 1e3 },
  ];
  if (fit.asymmetry !== null) {
    rows.push({
      ...common,
      trait: "asymmetry",
      ...fit.asymmetry,
      detail: "side lobes towards larger Δβ less those towards smaller, over the main lobe",
    });
  }
  const { grating, refs, from } = ownGrating(known, windows);
  const envelope = gratingEnvelope(
    grating,
    known.peak,
    mismatchSteps(grating.end - grating.start, CORRELATION_LENGTH),
    {
      poledLength: mm(known.guide.poled_length_mm),
      ...(known.profile === undefined ? {} : { profile: known.profile }),
    },
  );
  const spread = mismatchSpread(offsets, fit, envelope, CORRELATION_LENGTH);
  const at = `at a correlation length of ${CORRELATION_LENGTH * 1e3} mm, beside ${from}`;
  const readings = [...common.readings, ...refs];
  if (!isRefused(spread)) {
    rows.push({
      ...common,
      trait: "mismatch_sd_per_m",
      ...spread.sd,
      readings,
      detail: `${at}: ${spread.broadening.value.toFixed(3)} times as wide, with ${
        (100 * spread.structure).toFixed(1)
      } % of structure`,
    }, {
      ...common,
      trait: "peak_kept",
      ...spread.peakKept,
      readings,
      detail: `of the peak beside ${from}, by the shape of the curve`,
    });
  } else if (spread.below !== null) {
    // 0 with a limit for u: nothing that this guide would be given, but its neighbours' pool has to know of it.
    rows.push({
      ...common,
      trait: "mismatch_sd_per_m",
      value: 0,
      u: spread.below,
      readings,
      detail: `none told ${at}: ${spread.refused}`,
    });
  } else {
    rows[0] = { ...rows[0]!, detail: `${common.detail}; no spread told ${at}: ${spread.refused}` };
  }
  return rows;
}

function ownGrating(
  { guide, walls }: KnownGuide,
  windows: WindowsByUnit,
): { grating: Grating; refs: readonly ReadingRef[]; from: string } {
  // The lines of walls are in the scan's own row already: its offset is held against them.
  if (walls !== null) return { grating: walls, refs: [], from: "the guide's walls" };
  const at = {
    start: mm(guide.poled_from_mm),
    length: mm(guide.poled_length_mm),
    period: um(guide.period_um),
  };
  const found = windowsAround(windows, guide);
  if (found === null) return { grating: uniformGrating(at), refs: [], from: "an ideal grating" };
  return {
    grating: realiseGrating(
      { ...at, windows: windowStatistics(found.own.map(windowOf)) },
      randomFrom(`${guide.guide_id}|scan`),
    ),
    refs: refsOf("poling", found.own),
    from: `the poling windows of ${found.unit}`,
  };
}
