// Pure: no I/O, no clock, no hidden randomness.
export * from "./refusal.ts";
export * from "./straight_line.ts";
export * from "./cutback.ts";
