// Pure: no I/O, no clock, no hidden randomness.
import type { Figure } from "../../shared/schemas/figures.ts";
import { type Basis, weakestBasis } from "../../shared/vocabulary.ts";
import type { ArmTraits, GuideInputs, PolingTraits, UsedTrait } from "./guide_inputs.ts";

/** Traits of a guide by the role that they play in a prediction. */
export const ROLES = [
  "pump_loss",
  "signal_loss",
  "idler_loss",
  "signal_mode",
  "idler_mode",
  "signal_facet",
  "idler_facet",
  "poling",
  "phase_matching",
] as const;
export type Role = typeof ROLES[number];

const SPECTRAL: readonly Role[] = ["poling", "pump_loss"];
const SURVIVAL: readonly Role[] = ["pump_loss", "signal_loss", "idler_loss", "poling"];
const HERALDING_SIGNAL: readonly Role[] = [...SURVIVAL, "signal_facet", "signal_mode"];
const HERALDING_IDLER: readonly Role[] = [...SURVIVAL, "idler_facet", "idler_mode"];
const CONVERSION: readonly Role[] = ["pump_loss", "signal_loss", "idler_loss", "poling", "phase_matching"];

/** What each figure rests on. Numbers that the request gives (windows, detectors) rest on no trait. */
export const RESTS_ON: Readonly<Record<Figure, readonly Role[]>> = {
  operating_temperature_c: ["phase_matching"],
  operating_pump_nm: ["phase_matching"],
  efficiency_percent_per_w: CONVERSION,
  efficiency_percent_per_w_cm2: CONVERSION,
  acceptance_nm: ["poling"],
  peak_conversion: CONVERSION,
  pairs_per_pulse: SPECTRAL,
  pair_rate_hz: SPECTRAL,
  heralding_signal: HERALDING_SIGNAL,
  heralding_idler: HERALDING_IDLER,
  purity: SPECTRAL,
  schmidt_number: SPECTRAL,
  g2_unheralded: SPECTRAL,
  g2_heralded: [...SPECTRAL, ...HERALDING_IDLER],
  exchange_overlap: SPECTRAL,
  car: [...HERALDING_SIGNAL, ...HERALDING_IDLER],
  pump_power_at_g2_mw: [...SPECTRAL, ...HERALDING_IDLER],
  window_signal_nm: [],
  window_idler_nm: [],
  bandwidth_signal_nm: SPECTRAL,
  bandwidth_idler_nm: SPECTRAL,
  loss_db_cm_signal: ["signal_loss"],
  loss_db_cm_idler: ["idler_loss"],
  survival_signal: SURVIVAL,
  survival_idler: SURVIVAL,
  facet_signal: ["signal_facet"],
  facet_idler: ["idler_facet"],
  coupling_signal: ["signal_mode"],
  coupling_idler: ["idler_mode"],
  filter_signal: SPECTRAL,
  filter_idler: SPECTRAL,
  detector_signal: [],
  detector_idler: [],
};

/** Basis of one role in a guide. */
export function basisOfRole(role: Role, guide: GuideInputs): Basis {
  switch (role) {
    case "pump_loss":
      return guide.pumpLoss.basis;
    case "signal_loss":
      return guide.signal.loss.basis;
    case "idler_loss":
      return guide.idler.loss.basis;
    case "signal_mode":
      return modeBasis(guide.signal);
    case "idler_mode":
      return modeBasis(guide.idler);
    case "signal_facet":
      return facetBasis(guide.signal);
    case "idler_facet":
      return facetBasis(guide.idler);
    case "poling":
      return guide.mismatchSpread
        ? weakestBasis([polingBasis(guide.poling), guide.mismatchSpread.sd.basis])
        : polingBasis(guide.poling);
    case "phase_matching":
      // A scan of the guide itself measures the centre, whatever its geometry. Else it is calculated: from the platform's
      // index, the geometry, and what scans nearby say of both.
      if (guide.offset === null) return "platform";
      return weakestBasis([guide.offset.basis, ...guide.geometryErrors.map((e) => e.trait.basis)]);
  }
}

/** The weakest basis that a figure rests on. */
export const basisOf = (figure: Figure, guide: GuideInputs): Basis =>
  weakestBasis(RESTS_ON[figure].map((role) => basisOfRole(role, guide)));

const modeBasis = ({ mode }: ArmTraits): Basis => "reason" in mode ? "platform" : weakest([mode.x, mode.y]);
const facetBasis = ({ facet }: ArmTraits): Basis =>
  facet.state === "bare" ? facet.basis : facet.reflectivity.basis;
const polingBasis = (poling: PolingTraits): Basis =>
  poling.from === "duty" ? weakest([poling.duty, poling.dutySd, poling.merged]) : poling.basis;
const weakest = (traits: readonly UsedTrait[]): Basis => weakestBasis(traits.map((t) => t.basis));
