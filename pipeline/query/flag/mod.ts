// Rules that say what is out of line in a lot, and what is behind it.
export { flagsOf } from "./evaluate.ts";
export type { LotFacts, LotSummary } from "./facts.ts";
export { loadFacts, loadSummaries, predictionsInForce } from "./load.ts";
export { type LotChart, lotCharts } from "./lot_chart.ts";
export { dieVerdicts, inPlay, lotYield } from "./verdicts.ts";
export { loadRules, type Rule, type RuleOf, type Severity } from "./rules.ts";
export { suspectName, suspectSentence } from "./suspects_of.ts";
export { type Flag, type FlagSuspect, refText } from "./types.ts";
