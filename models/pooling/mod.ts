// Pure: no I/O, no clock, no hidden randomness.
export { type SpreadPrior, spreadPrior } from "./components.ts";
export type { Contradiction } from "./contradictions.ts";
export { MOST_WIDTHS, type Place, type TrendShape } from "./design.ts";
export { type Level, LEVELS, type LotObservation } from "./forest.ts";
export type { InformationShares } from "./information.ts";
export * from "./inherit.ts";
export { lowerQuantile } from "./lower_quantile.ts";
export { PLATFORM_DEGREES } from "./pool_priors.ts";
export * from "./pooled.ts";
export * from "./reml.ts";
export { STRONG_EVIDENCE, type TrendTrial } from "./trend.ts";
export * from "./truncated.ts";
