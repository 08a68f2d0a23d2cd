// Pure: no I/O, no clock, no hidden randomness.
import type { Random } from "../../../shared/random.ts";
import { individualsCharts } from "./individuals.ts";
import { type RunRule, runSignals, WESTERN_ELECTRIC } from "./run_rules.ts";

/**
 * Share of fault-free sequences of independent normal points in which some rule signals at least once: what a chart of so many points
 * promises. With `"estimated"` limits the points carry their own, as on a chart of all lots so far; with `"known"` ones they are judged
 * by the true centre and sigma. Seeded simulation: standard error √(share·(1 − share)/sequences).
 * @throws RangeError unless `points` is an integer ≥ 2 and `sequences` one ≥ 1
 */
export function falseAlarmShare(
  points: number,
  limits: "estimated" | "known",
  sequences: number,
  random: Random,
  rules: readonly RunRule[] = WESTERN_ELECTRIC,
): number {
  if (!Number.isSafeInteger(points) || points < 2 || !Number.isSafeInteger(sequences) || sequences < 1) {
    throw new RangeError(
      `Cannot count false alarms in ${sequences} sequences of ${points}: need integers, at least 1 of at least 2`,
    );
  }
  let alarmed = 0;
  for (let n = 0; n < sequences; n++) {
    const z = Array.from({ length: points }, () => random.normal());
    const signals = limits === "known"
      ? runSignals(z, rules)
      : individualsCharts(z, { rules }).individuals.signals;
    if (signals.length > 0) alarmed++;
  }
  return alarmed / sequences;
}
