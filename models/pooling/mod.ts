// Pure: no I/O, no clock, no hidden randomness.
export * from "./inherit.ts";
