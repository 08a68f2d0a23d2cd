import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { FigureStore } from "./figure_store.ts";

/**
 * The guide that stands for each die that can be shipped, as a ranking picks it: best in the request's order, ties by the
 * order of guides.
 * @returns positions of guides, ascending
 */
export function representatives(
  store: FigureStore,
  { orderBy, descending }: Pick<CheckedRequest, "orderBy" | "descending">,
  unavailable: ReadonlyMap<string, string>,
): number[] {
  const best = new Map<string, { guide: number; value: number | null }>();
  store.guides.forEach(({ die_id }, guide) => {
    if (unavailable.has(die_id)) return;
    const value = orderBy === "probability" ? store.probability(guide) : store.mean(guide, orderBy);
    const held = best.get(die_id);
    if (held === undefined || before(value, held.value, descending)) best.set(die_id, { guide, value });
  });
  return [...best.values()].map((b) => b.guide).sort((a, b) => a - b);
}

/** Whether a value ranks before another; one that does not exist ranks last. */
const before = (a: number | null, b: number | null, descending: boolean): boolean =>
  a !== null && (b === null || (descending ? a > b : a < b));
