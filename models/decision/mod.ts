// Pure: no I/O, no clock, no hidden randomness.
export * from "./conformity.ts";
export * from "./draws.ts";
