// Pure: no I/O, no clock, no hidden randomness.
export * from "./refusal.ts";
export * from "./straight_line.ts";
export * from "./cutback.ts";
export * from "./fringes.ts";
export * from "./facets.ts";
export * from "./mode_overlap.ts";
export * from "./nearest_reading.ts";
export * from "./tuning_scan.ts";
export * from "./effective_length.ts";
export * from "./mean_tuning_curve.ts";
export * from "./mismatch_spread.ts";
