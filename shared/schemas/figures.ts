// Pure: no I/O, no clock, no hidden randomness.
import type { Process } from "../vocabulary.ts";

const BUDGET = ["survival", "facet", "coupling", "filter", "detector"] as const;

/** Factors of the heralding budget of both arms, in the order in which light meets them. */
export const BUDGET_FIGURES = BUDGET.flatMap((f) => [`${f}_signal`, `${f}_idler`] as const);

/** Every figure that a prediction holds, in the order of output. */
export const FIGURES = [
  "operating_temperature_c",
  "operating_pump_nm",
  "efficiency_percent_per_w",
  "efficiency_percent_per_w_cm2",
  "acceptance_nm",
  "peak_conversion",
  "pairs_per_pulse",
  "pair_rate_hz",
  "heralding_signal",
  "heralding_idler",
  "purity",
  "schmidt_number",
  "g2_unheralded",
  "g2_heralded",
  "exchange_overlap",
  "car",
  "pump_power_at_g2_mw",
  "window_signal_nm",
  "window_idler_nm",
  "bandwidth_signal_nm",
  "bandwidth_idler_nm",
  "loss_db_cm_signal",
  "loss_db_cm_idler",
  ...BUDGET_FIGURES,
] as const;
export type Figure = typeof FIGURES[number];

const ALWAYS: readonly Figure[] = [
  "operating_temperature_c",
  "operating_pump_nm",
  "efficiency_percent_per_w",
  "efficiency_percent_per_w_cm2",
  "acceptance_nm",
  "loss_db_cm_signal",
  "loss_db_cm_idler",
];
const PAIRS: readonly Figure[] = [
  ...ALWAYS,
  "heralding_signal",
  "heralding_idler",
  "car",
  "exchange_overlap",
  "window_signal_nm",
  "window_idler_nm",
  "bandwidth_signal_nm",
  "bandwidth_idler_nm",
  ...BUDGET_FIGURES,
];
const PULSED: readonly Figure[] = [
  ...PAIRS,
  "pairs_per_pulse",
  "purity",
  "schmidt_number",
  "g2_unheralded",
  "g2_heralded",
  "pump_power_at_g2_mw",
];

/** Why a figure does not exist for a process, or null when it does. `pulsed` matters for pair generation only. */
export function figureAbsence(figure: Figure, process: Process, pulsed: boolean): string | null {
  if (process !== "pair-generation") {
    return ALWAYS.includes(figure) || figure === "peak_conversion" ? null : `not a figure of ${process}`;
  }
  if (pulsed) {
    if (figure === "pair_rate_hz") return "a figure of a continuous-wave pump; see pairs_per_pulse";
    return PULSED.includes(figure) ? null : "not a figure of pair-generation";
  }
  if (PAIRS.includes(figure) || figure === "pair_rate_hz") return null;
  return PULSED.includes(figure)
    ? "not a figure of a continuous-wave pump"
    : "not a figure of pair-generation";
}
