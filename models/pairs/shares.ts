// Pure: no I/O, no clock, no hidden randomness.
import type { PairSums } from "./marginals.ts";
import { absent, given, type Outcome } from "./outcome.ts";
import type { FilterShares } from "./source.ts";

/**
 * What the filters let through. An arm given the other: ∬|F|²T_sT_i/∬|F|²T_i, where the herald's partner may have any
 * frequency of its open window, also one that its own filter blocks.
 */
export function filterShares(
  { total, signal, idler, both }: Pick<PairSums, "total" | "signal" | "idler" | "both">,
): FilterShares | null {
  if (!(total > 0)) return null;
  return {
    signal: signal / total,
    idler: idler / total,
    both: both / total,
    signalGivenIdler: conditional(both, idler, "idler"),
    idlerGivenSignal: conditional(both, signal, "signal"),
  };
}

const conditional = (both: number, herald: number, arm: string): Outcome =>
  herald > 0
    ? given(Math.min(both / herald, 1), "filter share")
    : absent(`the ${arm}'s filter passes no pair`);
