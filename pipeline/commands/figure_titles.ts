import type { Figure } from "../../shared/schemas/figures.ts";

/** Column headings that leave room for three figures in 80 columns. */
export const SHORT: Partial<Record<Figure, string>> = {
  operating_temperature_c: "oven/°C",
  efficiency_percent_per_w: "%/W",
  efficiency_percent_per_w_cm2: "%/Wcm²",
  peak_conversion: "convers.",
  pairs_per_pulse: "pairs",
  pair_rate_hz: "pairs/s",
  heralding_signal: "herald.s",
  heralding_idler: "herald.i",
  purity: "purity",
  schmidt_number: "K",
  g2_heralded: "g2",
  g2_unheralded: "g2unh.",
  exchange_overlap: "overlap",
  acceptance_nm: "acc./nm",
  bandwidth_signal_nm: "bw.s/nm",
  bandwidth_idler_nm: "bw.i/nm",
  loss_db_cm_signal: "dB/cm s",
  loss_db_cm_idler: "dB/cm i",
};
