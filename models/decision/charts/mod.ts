// Pure: no I/O, no clock, no hidden randomness.
export * from "./capability.ts";
export * from "./chart_constants.ts";
export {
  ADVISED_BASELINE,
  type ChartKind,
  type ChartOptions,
  type ChartPoint,
  type ControlChart,
} from "./control_chart.ts";
export * from "./counts.ts";
export * from "./ewma.ts";
export * from "./false_alarms.ts";
export * from "./group_means.ts";
export * from "./individuals.ts";
export * from "./run_rules.ts";
export * from "./grouped_yield.ts";
export * from "./spread_growth.ts";
export * from "./nested_limits.ts";
