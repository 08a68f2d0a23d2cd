// Pure: no I/O, no clock, no hidden randomness.
export * from "./prefactor.ts";
export * from "./loss_weight.ts";
export * from "./efficiency.ts";
export * from "./closed_forms.ts";
export * from "./three_waves.ts";
export * from "./integrate_domains.ts";
export * from "./integrate_uniform.ts";
export * from "./peak_conversion.ts";
