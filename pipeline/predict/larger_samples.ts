import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { FigureStore } from "./figure_store.ts";
import { representatives } from "./representatives.ts";

/** The largest sample of a guide at the edge of a decision. */
export const MOST_DRAWS = 4096;
/**
 * Of a lot's guides at most one in this many (and a few, in small lots) is sampled again, for each request. A guide that goes
 * through 1,024 and 4,096 draws costs 20 times its first sample: were a whole lot at a threshold, each round would still take no
 * more than about as long as the first prediction.
 */
const GUIDES_PER_LARGER = 20;
const ALWAYS_LARGER = 12;

/** So often the choice is made again: another guide may then stand for a die. */
export const LARGER_ROUNDS = 3;

/**
 * Guides that get larger samples: those whose decision is not settled and whose die can be shipped. If these are too many,
 * first the guides that stand for their dies, then those nearest to a threshold; ties by the order of guides. Once some were
 * sampled again, only guides that have come to stand for their dies instead: the best of several small samples is best by
 * chance as well.
 * @param before guides that had their larger samples
 * @returns positions of guides, ascending
 */
export function guidesForLargerSamples(
  store: FigureStore,
  checked: CheckedRequest,
  unavailable: ReadonlyMap<string, string>,
  before: ReadonlySet<number> = new Set(),
): number[] {
  const standing = new Set(representatives(store, checked, unavailable));
  const { accept_at, reject_below } = checked.request.decide;
  const distance = (guide: number) =>
    Math.min(...[accept_at, reject_below].map((t) => Math.abs(store.probability(guide) - t)));
  const most = Math.max(ALWAYS_LARGER, Math.ceil(store.guides.length / GUIDES_PER_LARGER));
  return store.guides
    .map((_, guide) => guide)
    .filter((guide) => !before.has(guide) && (before.size === 0 || standing.has(guide)))
    .filter((guide) => !store.settled(guide) && !unavailable.has(store.guides[guide]!.die_id))
    .sort((a, b) => Number(standing.has(b)) - Number(standing.has(a)) || distance(a) - distance(b) || a - b)
    .slice(0, most)
    .sort((a, b) => a - b);
}
