import type { Cell } from "../console/mod.ts";
import { CONFIDENCE, type RequestReview, type ReviewData, type ShareOf } from "../review_types.ts";

/** Columns of a yield as a spreadsheet gets it. */
export const YIELD_COLUMNS = [
  "request",
  "scope",
  "id",
  "started",
  "accepted",
  "on_hold",
  "dies",
  "yield",
  "low",
  "high",
  "exact_low",
  "exact_high",
  "score_low",
  "score_high",
  "expected",
  "expected_low",
  "expected_high",
  "expected_together_low",
  "expected_together_high",
  "confidence",
] as const;

const rowOf = (request: string, scope: string, id: string, started: string | null, s: ShareOf): Cell[] => [
  request,
  scope,
  id,
  started,
  s.good,
  s.hold,
  s.of,
  s.value,
  s.low,
  s.high,
  s.exact.low,
  s.exact.high,
  s.score.low,
  s.score.high,
  s.expected?.dies ?? null,
  s.expected?.low ?? null,
  s.expected?.high ?? null,
  s.expected?.together_low ?? null,
  s.expected?.together_high ?? null,
  CONFIDENCE,
];

/** Yields of one request: the lot, its wafers, its mask groups. `low` and `high` allow for dies that share their wafer's fate. */
export const requestYieldRows = (
  { lot, started }: Pick<ReviewData, "lot" | "started">,
  r: RequestReview,
): Cell[][] => [
  rowOf(r.request, "lot", lot, started, r.total),
  ...r.wafers.map((w) => rowOf(r.request, "wafer", w.wafer, started, w)),
  ...r.groups.map((g) => rowOf(r.request, "group", g.group, started, g)),
];

/** Yields of every request, with those of the earlier lots that may be compared. */
export function allYieldRows(data: ReviewData): Cell[][] {
  return data.requests.flatMap((r) => [
    ...requestYieldRows(data, r),
    ...data.lots.filter((l) => l.request === r.request && l.lot !== data.lot).map((l): Cell[] => [
      r.request,
      "earlier lot",
      l.lot,
      l.started,
      l.good,
      null,
      l.of,
      l.good / l.of,
      l.low,
      l.high,
      l.exact.low,
      l.exact.high,
      l.score.low,
      l.score.high,
      // What an earlier lot's probabilities let one expect stands in its own review.
      ...Array<null>(5).fill(null),
      CONFIDENCE,
    ]),
  ]);
}
