import { compareIds } from "../../../shared/ids.ts";
import type { LotSummary, MadeWith } from "./facts.ts";
import { plural } from "./types.ts";

/** Something of an earlier lot that is not compared, because it was computed differently. */
export interface LeftOut {
  readonly lot: string;
  /** `traits`, or the request whose yield it is. */
  readonly what: string;
  readonly why: "model" | "platform" | "request";
  readonly theirs: string;
  readonly own: string;
}

/** Lots of the platform before another one, in the order of time. A lot without a date has no place among them. */
export function lotsBefore(lot: LotSummary, all: readonly LotSummary[]): LotSummary[] {
  if (lot.started === null) return [];
  return all.filter((l) =>
    l.lot !== lot.lot && l.started !== null &&
    (l.started < lot.started! || (l.started === lot.started && compareIds(l.lot, lot.lot) < 0))
  ).sort((a, b) => a.started! < b.started! ? -1 : a.started! > b.started! ? 1 : compareIds(a.lot, b.lot));
}

/** What differs first between how two numbers were made; null where they may be compared. */
function difference(own: MadeWith, theirs: MadeWith): Pick<LeftOut, "why" | "own" | "theirs"> | null {
  const pairs = [
    ["model", own.model, theirs.model],
    ["platform", own.platform_sha256, theirs.platform_sha256],
    ["request", own.request_sha256 ?? "", theirs.request_sha256 ?? ""],
  ] as const;
  const found = pairs.find(([, a, b]) => a !== b);
  return found === undefined ? null : { why: found[0], own: found[1], theirs: found[2] };
}

/**
 * Earlier lots with what of them may be compared: traits and yields that were made by the same model version from the same
 * platform file (and request). A lot none of whose numbers may be compared is not among them.
 */
export function earlierLots(lot: LotSummary, all: readonly LotSummary[]): LotSummary[] {
  return lotsBefore(lot, all).map((l): LotSummary => ({
    ...l,
    series: difference(lot.made, l.made) === null ? l.series : new Map(),
    yields: new Map(
      [...l.yields].filter(([request, y]) => {
        const own = lot.yields.get(request);
        return own === undefined || difference(own.made, y.made) === null;
      }),
    ),
  })).filter((l) => l.series.size > 0 || l.yields.size > 0);
}

/** What of the lots before is not compared. */
export function leftOut(lot: LotSummary, all: readonly LotSummary[]): LeftOut[] {
  return lotsBefore(lot, all).flatMap((l) => {
    const traits = difference(lot.made, l.made);
    const yields = [...l.yields].flatMap(([request, y]) => {
      const own = lot.yields.get(request);
      const found = own === undefined ? null : difference(own.made, y.made);
      return found === null ? [] : [{ lot: l.lot, what: request, ...found }];
    });
    return traits === null ? yields : [{ lot: l.lot, what: "traits", ...traits }, ...yields];
  });
}

const WHY = {
  model: (l: LeftOut) =>
    `computed by model ${l.theirs}, this lot by model ${l.own}; predict them again to compare`,
  platform: () => "computed from another content of the platform file; predict them again to compare",
  request: () => "computed for another content of the request; predict them again to compare",
} as const;

/** One sentence per reason: how many lots are left out of a comparison, which, and why. */
export function leftOutSentences(all: readonly LeftOut[]): string[] {
  const groups = Map.groupBy(all, (l) => `${l.why}|${l.theirs}`);
  return [...groups.values()].map((own) => {
    const lots = [...new Set(own.map((l) => l.lot))];
    const what = [...new Set(own.map((l) => l.what === "traits" ? "traits" : `yield for ${l.what}`))];
    const shown = lots.slice(0, 6).join(", ") + (lots.length > 6 ? ` and ${lots.length - 6} more` : "");
    return `${plural(lots.length, "earlier lot")} (${shown}) left out for ${what.join(", ")}: ${
      WHY[own[0]!.why](own[0]!)
    }`;
  });
}
