// Pure: no I/O, no clock, no hidden randomness.
export * from "./prefactor.ts";
export * from "./loss_weight.ts";
export * from "./efficiency.ts";
export * from "./closed_forms.ts";
