// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";
import { isRefused, type Refused } from "./refusal.ts";
import { fitLines, type LineFit, type LinePoint, OUTLIER_LEVEL } from "./straight_line.ts";

/** One insertion loss at one length: m, dB, standard uncertainty in dB (0: not known). */
export interface CutbackPoint {
  readonly length: number;
  readonly lossDb: number;
  readonly u: number;
}

/** Propagation and coupling loss from insertion loss against length. */
export interface CutbackFit {
  /** Power attenuation α, 1/m; may come out negative, reading errors being what they are. */
  readonly alpha: Uncertain;
  readonly slope_db_cm: Uncertain;
  /** Loss at no length (both facets and couplings), dB; one, or one per guide. */
  readonly coupling_db: readonly Uncertain[];
  /** Covariance of slope_db_cm and coupling_db, dB²/cm. */
  readonly covariance: readonly number[];
  /** χ², p-value, residuals in the order of `used`, outliers; its `scatterFactor` times u covers scatter wider than the readings claim. */
  readonly fit: LineFit;
  /** Whether the guides share a coupling loss, have their own, or there is one guide. */
  readonly intercept: "one-guide" | "common" | "own";
  /** The readings that the slope rests on, by guide (0 for one guide) and position. */
  readonly used: readonly { readonly group: number; readonly point: number }[];
}

/**
 * Cut-back of one guide at one wavelength and polarisation: weighted straight line of insertion loss against length.
 * If any u is exactly 0 all weights are equal and the uncertainties come from the scatter.
 * Refused with fewer than two lengths: see `fitCommonSlope()`.
 * @param level chance of naming any outlier among good readings of this line
 * @throws RangeError for a number that is not finite, a negative u, or a length that is not positive
 */
export function fitCutback(points: readonly CutbackPoint[], level = OUTLIER_LEVEL): CutbackFit | Refused {
  if (points.length < 2) {
    return { refused: `no slope from ${points.length} cut-back readings: need two lengths` };
  }
  return fitted([points], [0], "one-guide", level);
}

/**
 * Cut-back of a die whose guides do not have two lengths each: one slope for all.
 *
 * Where any guide was measured at two lengths or more, guides keep intercepts of their own: their couplings differ
 * and cancel within each guide; a guide with a single length then says nothing about the slope and is not in `used`.
 * Where every guide has a single length (guides of a die left at different lengths), one common coupling loss is
 * assumed, which is what identical ends and one alignment mean; a spread of the coupling shows in χ² and
 * `scatterFactor`.
 * @param groups the readings of each guide, one wavelength and polarisation
 * @throws RangeError for a number that is not finite, a negative u, or a length that is not positive
 */
export function fitCommonSlope(
  groups: readonly (readonly CutbackPoint[])[],
  level = OUTLIER_LEVEL,
): CutbackFit | Refused {
  const telling = groups.map((_, g) => g).filter((g) => new Set(groups[g]!.map((p) => p.length)).size > 1);
  if (telling.length > 0) return fitted(telling.map((g) => groups[g]!), telling, "own", level);
  const present = groups.map((_, g) => g).filter((g) => groups[g]!.length > 0);
  const total = present.reduce((sum, g) => sum + groups[g]!.length, 0);
  if (total < 2) return { refused: `no slope from ${total} cut-back readings: need two lengths` };
  return fitted(present.map((g) => groups[g]!), present, "common", level);
}

function fitted(
  groups: readonly (readonly CutbackPoint[])[],
  ids: readonly number[],
  intercept: CutbackFit["intercept"],
  level: number,
): CutbackFit | Refused {
  for (const { length } of groups.flat()) {
    if (!(length > 0)) throw new RangeError(`Cannot fit a cut-back: found length ${length} m, need > 0`);
  }
  const places = groups.map((group, g) => group.map((_, point) => ({ group: ids[g]!, point })));
  const merge = <T>(rows: readonly (readonly T[])[]) => intercept === "common" ? [rows.flat()] : rows;
  const lines = merge(groups.map((group) => group.map(toLine)));
  const fit = fitLines(lines, level);
  if (isRefused(fit)) return fit;
  const merged = merge(places);
  const alphaPerDb = Math.LN10 / 10;
  return {
    alpha: { value: fit.slope * alphaPerDb, u: fit.uSlope * alphaPerDb },
    slope_db_cm: { value: fit.slope / 100, u: fit.uSlope / 100 },
    coupling_db: fit.intercept.map((value, k) => ({ value, u: fit.uIntercept[k]! })),
    covariance: fit.covariance.map((c) => c / 100),
    // in the caller's own numbering of guides and readings
    fit: { ...fit, outliers: fit.outliers.map(({ group, point }) => merged[group]![point]!) },
    intercept,
    used: places.flat(),
  };
}

const toLine = ({ length, lossDb, u }: CutbackPoint): LinePoint => ({ x: length, y: lossDb, u });
