// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";
import { asymmetry } from "./_asymmetry.ts";
import { fitSinc } from "./_sinc_fit.ts";
import { sincStart } from "./_sinc_start.ts";
import { chiSquareTail, normalTails } from "./_tails.ts";
import type { Refused } from "./refusal.ts";

/** One point of a scan: x is the fundamental wavelength or the temperature, power on a free scale and offset. */
export interface ScanPoint {
  readonly x: number;
  readonly power: number;
  /** Standard uncertainty of the power; left out or 0 anywhere: equal weights, u from the scatter. */
  readonly u?: number;
}

/** A tuning curve as offset + scale·sinc². The first two are in the unit of x, the others in that of power. */
export interface TuningFit {
  readonly centre: Uncertain;
  /** Full width at half maximum. */
  readonly fwhm: Uncertain;
  readonly scale: Uncertain;
  readonly offset: Uncertain;
  /** What the sinc² leaves. */
  readonly residual: {
    readonly sd: number;
    /** sd/scale: the share of the peak that the model misses. */
    readonly relative: number;
    /** Correlation of neighbours in x; 0 for white noise, near 1 where the shape is wrong. */
    readonly lag1: number;
    /** P of neighbours this alike if the shape were right (one-sided, normal). */
    readonly pShape: number;
    /** Against the given u; null if the scan gave none. */
    readonly chiSquared: number | null;
    readonly pValue: number | null;
    readonly degreesOfFreedom: number;
  };
  /**
   * Side-lobe weight above the centre less that below, over the weight of the main lobe, each the area of
   * power − offset: lobes from the first null out as far as the scan reaches on both sides, at most to the third
   * null. 0 for a symmetric curve, its sign in x; its u is that of the points' noise. Null where the scan does not
   * reach the second null on both sides.
   */
  readonly asymmetry: Uncertain | null;
  /** Positions of the points used, and of those left out for not being finite. */
  readonly used: readonly number[];
  readonly ignored: readonly number[];
}

const FEWEST = 8;
/** Scale over its own u below which a search over centre and width finds a peak in plain noise, too. */
const STANDS_OUT = 6;

/**
 * Fits a tuning curve with offset + scale·sinc²(2·1.391557·(x − centre)/FWHM): over a scan ΔβL is linear in x, so the
 * fit is in x and needs no dispersion. Start values from a search, then Levenberg–Marquardt. All u are widened by
 * √((1+r)/(1−r)) where the residuals of neighbours correlate (r > 0): what the shape misses is not white noise;
 * and by √(χ²/ν) where the scatter exceeds the given u.
 * The order of the points does not matter and repeats are kept.
 * Refused with the reason: too few points, one x only, no peak out of the noise, a peak at the edge of the scan or
 * narrower than its steps.
 * @throws RangeError for a u that is negative or not finite
 */
export function fitTuningScan(points: readonly ScanPoint[]): TuningFit | Refused {
  const finite = points.map((p) => Number.isFinite(p.x) && Number.isFinite(p.power));
  const ignored = points.map((_, k) => k).filter((k) => !finite[k]);
  const used = points.map((_, k) => k).filter((k) => finite[k]);
  let weighted = true;
  for (const k of used) {
    const u = points[k]!.u ?? 0;
    if (!(u >= 0 && u < Infinity)) {
      throw new RangeError(`Cannot fit a scan: found u ${u}, need a finite u >= 0`);
    }
    if (u === 0) weighted = false;
  }
  const order = [...used].sort((a, b) => points[a]!.x - points[b]!.x || a - b);
  const distinct = new Set(order.map((k) => points[k]!.x)).size;
  if (distinct < FEWEST) {
    return { refused: `${distinct} different scan positions: a peak with its width needs ${FEWEST}` };
  }
  const n = order.length;
  const [least, most] = [points[order[0]!]!.x, points[order[n - 1]!]!.x];
  const powers = order.map((k) => points[k]!.power);
  const [lowest, highest] = [Math.min(...powers), Math.max(...powers)];
  if (!(highest > lowest)) return { refused: `the same power ${lowest} at all ${n} scan points: no peak` };

  // To −1…1 and 0…1, for the fit's sake.
  const [middle, half, range] = [(least + most) / 2, (most - least) / 2, highest - lowest];
  const x = Float64Array.from(order, (k) => (points[k]!.x - middle) / half);
  const y = Float64Array.from(powers, (p) => (p - lowest) / range);
  const sigma = Float64Array.from(order, (k) => weighted ? points[k]!.u! / range : 1);
  const leastSigma = Math.min(...sigma);
  const w = sigma.map((s) => (leastSigma / s) ** 2);
  const start = sincStart(x, y, w);
  if (start === null) return { refused: "no peak rises in the scan" };
  const fit = fitSinc(x, y, w, [start.centre, start.width, start.scale, start.offset]);
  if (fit === null) return { refused: "no peak whose height and width can be told apart" };
  const { parameters, residual, weightedSquares } = fit;
  const dof = n - 4;
  const unit = weighted ? leastSigma ** 2 : weightedSquares / dof;
  const lag1 = neighbours(residual, w);
  const repeated = Math.min(0.98, Math.max(0, lag1));
  const widening = Math.sqrt((1 + repeated) / (1 - repeated));
  const own = fit.variance.map((v) => Math.sqrt(v * unit));
  const excess = weighted ? Math.max(1, Math.sqrt(weightedSquares / unit / dof)) : 1;
  const u = own.map((sd) => sd * widening * excess);
  const [centre, width, scale, offset] = parameters;

  // Without the widening: that speaks of the shape, and of a peak there may be no doubt.
  if (!(scale > STANDS_OUT * own[2]!)) {
    return { refused: `no peak stands out of the noise: height ${scale * range}, u ${own[2]! * range}` };
  }
  if (!(centre - width / 2 >= -1 && centre + width / 2 <= 1)) {
    return {
      refused: `the peak at ${middle + half * centre}, ${
        half * width
      } wide, is not inside the scan ${least} to ${most}`,
    };
  }
  const inside = new Set(x.filter((at) => Math.abs(at - centre) <= width / 2)).size;
  if (inside < 3) {
    return {
      refused: `${inside} scan positions within the peak at ${
        middle + half * centre
      }: too coarse for a width`,
    };
  }
  if (!fit.settled) return { refused: "the fit did not settle on a peak" };

  const chiSquared = weighted ? weightedSquares / unit : null;
  const plain = Math.sqrt(residual.reduce((sum, r) => sum + r * r, 0) / dof);
  return {
    centre: { value: middle + half * centre, u: half * u[0]! },
    fwhm: { value: half * width, u: half * u[1]! },
    scale: { value: range * scale, u: range * u[2]! },
    offset: { value: lowest + range * offset, u: range * u[3]! },
    residual: {
      sd: range * plain,
      relative: plain / scale,
      lag1,
      pShape: lag1 > 0 ? normalTails(lag1 * Math.sqrt(n)) / 2 : 1 - normalTails(lag1 * Math.sqrt(n)) / 2,
      chiSquared,
      pValue: chiSquared === null ? null : chiSquareTail(chiSquared, dof),
      degreesOfFreedom: dof,
    },
    asymmetry: asymmetry(x, y, parameters, noise(residual)),
    used,
    ignored,
  };
}

/** Noise of one point from the steps between neighbours, which a wrong shape hardly enters (J. von Neumann, 1941). */
function noise(residual: Float64Array): number {
  let squares = 0;
  for (let k = 1; k < residual.length; k++) squares += (residual[k]! - residual[k - 1]!) ** 2;
  return Math.sqrt(squares / (2 * (residual.length - 1)));
}

/** Correlation of each residual with the next in x. */
function neighbours(residual: Float64Array, w: Float64Array): number {
  let [together, squares] = [0, 0];
  for (let k = 0; k < residual.length; k++) {
    const r = residual[k]! * Math.sqrt(w[k]!);
    squares += r * r;
    if (k > 0) together += r * residual[k - 1]! * Math.sqrt(w[k - 1]!);
  }
  return squares === 0 ? 0 : together / squares;
}
