// Pure: no I/O, no clock, no hidden randomness.
import type { Figure } from "../../shared/schemas/figures.ts";
import { absent, type Outcome } from "./outcome.ts";

/** Those of the output's figures that this room computes, in their own units. */
export const PAIR_FIGURES = [
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
  "survival_signal",
  "survival_idler",
  "facet_signal",
  "facet_idler",
  "coupling_signal",
  "coupling_idler",
  "filter_signal",
  "filter_idler",
  "detector_signal",
  "detector_idler",
] as const satisfies readonly Figure[];
export type PairFigure = typeof PAIR_FIGURES[number];

/** Figures that need the pair spectrum. */
export type PairPart = Pick<
  Record<PairFigure, Outcome>,
  | "pairs_per_pulse"
  | "pair_rate_hz"
  | "purity"
  | "schmidt_number"
  | "g2_unheralded"
  | "g2_heralded"
  | "exchange_overlap"
  | "car"
  | "pump_power_at_g2_mw"
  | "bandwidth_signal_nm"
  | "bandwidth_idler_nm"
>;

export const NOT_CONTINUOUS = "not a figure of a continuous-wave pump";
const PULSED_ONLY = ["pairs_per_pulse", "purity", "schmidt_number", "g2_unheralded", "g2_heralded"] as const;
export const NO_RATE = "a figure of a continuous-wave pump; see pairs_per_pulse";
export const NO_LIMIT = "the request sets no upper limit on g2_heralded";

/** {@link PairPart} of a guide without operating point. */
export function nothing(reason: string, pulsed: boolean): PairPart {
  const no = absent(reason);
  const part: { -readonly [name in keyof PairPart]: Outcome } = {
    pairs_per_pulse: no,
    pair_rate_hz: pulsed ? absent(NO_RATE) : no,
    purity: no,
    schmidt_number: no,
    g2_unheralded: no,
    g2_heralded: no,
    exchange_overlap: no,
    car: no,
    pump_power_at_g2_mw: no,
    bandwidth_signal_nm: no,
    bandwidth_idler_nm: no,
  };
  if (!pulsed) {
    for (const name of PULSED_ONLY) part[name] = absent(NOT_CONTINUOUS);
    part.pump_power_at_g2_mw = absent(NOT_CONTINUOUS);
  }
  return part;
}
