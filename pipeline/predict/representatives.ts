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

/**
 * The guides whose analysis speaks for the dies: those that stand for them, but a guide that matches nowhere leaves its
 * place to the one of its die that matches most often, if they rank alike. What traits at their targets would bring a die
 * can't be told by a guide that was drawn for another process.
 * @returns positions of guides, ascending
 */
export function guidesToAnalyse(
  store: FigureStore,
  request: Pick<CheckedRequest, "orderBy" | "descending">,
  unavailable: ReadonlyMap<string, string>,
): number[] {
  const standing = representatives(store, request, unavailable);
  const [matching, lost] = [true, false].map((some) =>
    standing.filter((guide) => store.matched(guide) > 0 === some)
  );
  const better = new Map(lost!.map((guide) => [store.guides[guide]!.die_id, guide]));
  store.guides.forEach(({ die_id }, guide) => {
    const held = better.get(die_id);
    if (held === undefined || store.probability(guide) !== store.probability(held)) return;
    if (store.matched(guide) > store.matched(held)) better.set(die_id, guide);
  });
  return [...matching!, ...better.values()].sort((a, b) => a - b);
}

/** Whether a value ranks before another; one that does not exist ranks last. */
const before = (a: number | null, b: number | null, descending: boolean): boolean =>
  a !== null && (b === null || (descending ? a > b : a < b));
