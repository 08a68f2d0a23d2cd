// Pure: no I/O, no clock, no hidden randomness.
export * from "./neighbours.ts";
export { type NoAnswer, type SiteValue, type TermTest } from "./site_fit.ts";
export { type EdgeEffect, edgeEffect, type TrendSurface, type WaferTrend, waferTrend } from "./trend.ts";
export * from "./nested_variance.ts";
