// Pure: no I/O, no clock, no hidden randomness.
import { chiSquareTail, normalTails, studentTails } from "./_tails.ts";
import type { Refused } from "./refusal.ts";

/** One reading of a line; u is the standard uncertainty of y, 0 where it is not known. */
export interface LinePoint {
  readonly x: number;
  readonly y: number;
  readonly u: number;
}

/** Lines of one slope, each with an intercept of its own, fitted together. */
export interface LineFit {
  readonly slope: number;
  readonly uSlope: number;
  /** One for each group, at x = 0. */
  readonly intercept: readonly number[];
  readonly uIntercept: readonly number[];
  /** Covariance of the slope with each intercept. */
  readonly covariance: readonly number[];
  /** `given`: from the u of the readings; `scatter`: some u was 0, so equal weights and u from the residuals. */
  readonly uncertainty: "given" | "scatter";
  /** Residual variance over the given one; null with u from scatter, or where nothing is left over to test. */
  readonly chiSquared: number | null;
  readonly degreesOfFreedom: number;
  /** P(χ² at least as large | the u of the readings hold). */
  readonly pValue: number | null;
  /** √(Σ r²/ν) of plain residuals; null without degrees of freedom. */
  readonly residualSd: number | null;
  /** max(1, √(χ²/ν)): times u it covers a scatter wider than the readings claim (R. T. Birge, 1932). */
  readonly scatterFactor: number;
  /** Residuals over their own standard deviation, by group and point. */
  readonly standardised: readonly (readonly number[])[];
  /** Readings that are too far off to be chance at the level asked; named here, never left out of the fit. */
  readonly outliers: readonly { readonly group: number; readonly point: number }[];
}

/** Level at which a reading is named an outlier, for all readings that are looked through together (Bonferroni). */
export const OUTLIER_LEVEL = 0.05;

/**
 * Weighted least squares of y = intercept[group] + slope·x (ISO/TS 28037:2010, clause 6; the same with several
 * intercepts). Centred on each group's weighted mean before squaring.
 * @param level chance of naming any outlier among good readings of this fit; of many fits each takes its share
 * @throws RangeError for a number that is not finite, or a negative u
 */
export function fitLines(
  groups: readonly (readonly LinePoint[])[],
  level = OUTLIER_LEVEL,
): LineFit | Refused {
  const fit = fitOnce(groups);
  return "refused" in fit ? fit : { ...fit, outliers: outliersOf(groups, fit, level) };
}

/**
 * Readings off the line. One wild reading pulls the line away from its neighbours, so that these seem off, too: the worst is
 * named first, and the others are held against the line without it.
 */
function outliersOf(
  groups: readonly (readonly LinePoint[])[],
  whole: FitOnly,
  level: number,
): LineFit["outliers"] {
  const kept = groups.map((group) => [...group.keys()]);
  const named: { group: number; point: number }[] = [];
  for (let fit: FitOnly | Refused = whole; !("refused" in fit);) {
    let worst = { group: 0, at: 0, r: 0 };
    fit.standardised.forEach((row, group) =>
      row.forEach((r, at) => {
        if (Math.abs(r) > Math.abs(worst.r)) worst = { group, at, r };
      })
    );
    const count = kept.reduce((sum, points) => sum + points.length, 0);
    const tail = outlierTail(worst.r, fit.degreesOfFreedom, fit.uncertainty === "scatter");
    if (tail * count >= level) break;
    named.push({ group: worst.group, point: kept[worst.group]!.splice(worst.at, 1)[0]! });
    fit = fitOnce(kept.map((points, g) => points.map((k) => groups[g]![k]!)));
  }
  return named.sort((a, b) => a.group - b.group || a.point - b.point);
}

type FitOnly = Omit<LineFit, "outliers">;

function fitOnce(groups: readonly (readonly LinePoint[])[]): FitOnly | Refused {
  let count = 0;
  let unknown = false;
  let leastU = Infinity;
  for (const { x, y, u } of groups.flat()) {
    if (!(Number.isFinite(x) && Number.isFinite(y) && u >= 0 && u < Infinity)) {
      throw new RangeError(
        `Cannot fit a line: found x ${x}, y ${y}, u ${u}, need finite numbers and u >= 0`,
      );
    }
    count++;
    if (u === 0) unknown = true;
    leastU = Math.min(leastU, u);
  }
  const dof = count - groups.length - 1;
  // Weights relative to the best reading: 1/u² alone may overflow.
  const weightOf = (point: LinePoint) => unknown ? 1 : (leastU / point.u) ** 2;
  const centres = groups.map((group) => centreOf(group, weightOf));
  let sxx = 0;
  let sxy = 0;
  groups.forEach((group, g) => {
    for (const point of group) {
      const dx = point.x - centres[g]!.x;
      sxx += weightOf(point) * dx * dx;
      sxy += weightOf(point) * dx * (point.y - centres[g]!.y);
    }
  });
  const reach = Math.max(...groups.flat().map((point) => Math.abs(point.x)), 0);
  // Spread below the rounding of x itself is no spread.
  if (!(Math.sqrt(sxx) > 1e-12 * reach)) {
    return { refused: `no slope from ${count} readings: all at one length` };
  }
  if (unknown && dof < 1) {
    return {
      refused:
        `no uncertainty from ${count} readings without their own: nothing is left over to show scatter`,
    };
  }
  const slope = sxy / sxx;
  const residual = groups.map((group, g) =>
    group.map((point) => (point.y - centres[g]!.y) - slope * (point.x - centres[g]!.x))
  );
  let weightedSquares = 0;
  let squares = 0;
  groups.forEach((group, g) =>
    group.forEach((point, k) => {
      weightedSquares += weightOf(point) * residual[g]![k]! ** 2;
      squares += residual[g]![k]! ** 2;
    })
  );
  // Variance of a reading of weight 1.
  const unit = unknown ? weightedSquares / dof : leastU ** 2;
  const chiSquared = unknown || dof < 1 ? null : weightedSquares / unit;
  const standardised = groups.map((group, g) =>
    group.map((point, k) => {
      const w = weightOf(point);
      const leverage = w / centres[g]!.weight + w * (point.x - centres[g]!.x) ** 2 / sxx;
      const sd = Math.sqrt(unit / w * Math.max(0, 1 - leverage));
      // A reading that the fit has to pass through says nothing about itself; nor does an exact fit.
      return leverage > 1 - 1e-9 || sd === 0 ? 0 : residual[g]![k]! / sd;
    })
  );
  return {
    slope,
    uSlope: Math.sqrt(unit / sxx),
    intercept: centres.map((c) => c.y - slope * c.x),
    uIntercept: centres.map((c) => Math.sqrt(unit * (1 / c.weight + c.x * c.x / sxx))),
    covariance: centres.map((c) => -unit * c.x / sxx),
    uncertainty: unknown ? "scatter" : "given",
    chiSquared,
    degreesOfFreedom: dof,
    pValue: chiSquared === null ? null : chiSquareTail(chiSquared, dof),
    residualSd: dof < 1 ? null : Math.sqrt(squares / dof),
    scatterFactor: chiSquared === null ? 1 : Math.max(1, Math.sqrt(chiSquared / dof)),
    standardised,
  };
}

function centreOf(group: readonly LinePoint[], weightOf: (point: LinePoint) => number) {
  let weight = 0;
  let x = 0;
  let y = 0;
  for (const point of group) {
    const w = weightOf(point);
    weight += w;
    x += w * point.x;
    y += w * point.y;
  }
  return { weight, x: x / weight, y: y / weight };
}

/** P of a standardised residual this large; with u from the same scatter its bound √ν makes it Student's on ν − 1. */
function outlierTail(r: number, dof: number, fromScatter: boolean): number {
  if (!fromScatter) return normalTails(r);
  if (dof < 2) return 1;
  if (r * r >= dof) return 0;
  return studentTails(r * Math.sqrt((dof - 1) / (dof - r * r)), dof - 1);
}
