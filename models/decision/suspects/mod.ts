// Pure: no I/O, no clock, no hidden randomness.
export * from "./fisher.ts";
export * from "./multiple_tests.ts";
export * from "./shuffle.ts";
export * from "./suspects.ts";
