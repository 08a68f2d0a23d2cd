// Pure: no I/O, no clock, no hidden randomness.
import {
  envelopeCurves,
  type GratingEnvelope,
  mismatchSteps,
  realiseMismatch,
  stepPhases,
} from "../poling/mod.ts";
import { randomFrom } from "../../shared/random.ts";
import type { Uncertain } from "../../shared/vocabulary.ts";
import { peakShape } from "./_peak_shape.ts";
import type { Refused } from "./refusal.ts";
import type { TuningFit } from "./tuning_scan.ts";

/** A spread of the mismatch along a guide that would explain the shape of its tuning curve. */
export interface MismatchSpread {
  /** Standard deviation of δβ(z), 1/m. */
  readonly sd: Uncertain;
  /** Measured width over that of the guide without a spread, as the same fit finds both. */
  readonly broadening: Uncertain;
  /** Root of what neighbouring points differ alike from the fitted sinc², as a share of the peak; noise is not in it. */
  readonly structure: number;
  /**
   * Share of the peak efficiency without a spread that is kept. The area under |φ|² is conserved, so the shape tells the height,
   * and better than it tells σ: it depends on this guide's δβ, not on what others of the same σ have.
   */
  readonly peakKept: Uncertain;
}

/** Why no spread is told; `below`: where a single guide's curve leaves an upper limit, its σ lies below with P = 0.683, 1/m. */
export interface NoSpread extends Refused {
  readonly below: number | null;
}

/** Simulated guides, and standard deviations that each is given, from 0 to the largest in equal steps. */
const GUIDES = 64;
const STEPS = 24;
/**
 * The largest one has the phase walk by so many rad over the guide (root mean square, ℓ ≪ L): beyond it side peaks are as
 * high as the main one.
 */
const WIDEST_WALK = 8;
/** How near a simulated curve has to come to count: relative in width and structure, and a least structure. */
const NEAR = { width: 0.02, structure: 0.15, least: 0.003 };
/** ln of the likelihood by which no spread at all has to be worse than the best one. */
const TOLD = 2;
/** Below this likelihood even the best spread does not explain the curve: over three times too far off. */
const UNEXPLAINED = Math.exp(-4.5);

/** Mean product of neighbours to an amplitude, with its sign. */
const amplitude = (product: number) => Math.sign(product) * Math.sqrt(Math.abs(product));

/**
 * Standard deviation of δβ at a stated correlation length ℓ that explains the shape of a tuning curve: how much broader it
 * is than the guide's own, and how much structure beside the main peak it has.
 *
 * δβ(z) is taken as stationary, normal, with covariance σ²e^{−|Δz|/ℓ}. Realisations of many σ are put on the guide's own
 * grating, sampled at the scan's own points and fitted as the scan was. Every one of them weighs by how near its width and
 * structure come to the scan's (rejection sampling made smooth: M. A. Beaumont, W. Zhang & D. J. Balding, Genetics 162, 2025
 * (2002)); σ has equal weight a priori. The width alone says little: with ℓ ≪ L one guide keeps a narrow main peak and loses
 * its height to side peaks. The height itself is on a free scale and cannot be used. u holds the reading and that other
 * guides of the same σ would look different.
 * Refused where the curve is as without a spread, so that only an upper limit could be told, or is like none with one.
 * @param offsets of the scan's points from the fitted centre in scaled Δβ, 1/m, those that the fit used
 * @param envelope the guide without a spread, of `mismatchSteps` stretches for ℓ
 * @param correlationLength ℓ, m
 * @throws RangeError for a correlation length that is not positive, or an envelope cut otherwise
 */
export function mismatchSpread(
  offsets: Float64Array,
  { fwhm, residual }: Pick<TuningFit, "fwhm" | "residual">,
  envelope: GratingEnvelope,
  correlationLength: number,
): MismatchSpread | NoSpread {
  const length = envelope.step * envelope.re.length;
  if (mismatchSteps(length, correlationLength) !== envelope.re.length) {
    throw new RangeError(
      `Cannot tell a spread: found an envelope of ${envelope.re.length} stretches, need ${
        mismatchSteps(length, correlationLength)
      }`,
    );
  }
  const x = Float64Array.from(offsets).sort();
  const curveOf = envelopeCurves(envelope);
  const sampled = (theta?: Float64Array) => {
    const curve = curveOf(theta);
    const y = x.map((at) => curve.power(curve.peak.at + at) / curve.peak.power);
    const shape = peakShape(x, y, curve.width ?? fwhm.value);
    return { shape, height: curve.peak.power };
  };
  const own = sampled();
  if (own.shape === null) {
    return { refused: "the scan's points would not show the peak of the guide's own grating", below: null };
  }
  const { width, height } = { width: own.shape.width, height: own.height };
  const broadening = { value: fwhm.value / width, u: fwhm.u / width };
  const n = residual.degreesOfFreedom + 4;
  const squares = residual.relative ** 2 * residual.degreesOfFreedom / n;
  const product = residual.lag1 * squares;
  const noise = squares * (1 - Math.max(0, residual.lag1));
  const uProduct = Math.sqrt(noise * (noise + 2 * Math.max(0, product)) / n);
  const structure = amplitude(product);
  const uStructure = uProduct / (2 * Math.max(Math.abs(structure), Math.sqrt(uProduct)));
  const near = {
    width: Math.hypot(broadening.u, NEAR.width * broadening.value),
    structure: Math.hypot(uStructure, NEAR.structure * structure, NEAR.least),
  };
  const likelihood = (shape: { readonly width: number; readonly structure: number } | null): number =>
    shape === null ? 0 : Math.exp(
      -0.5 * ((shape.width / width - broadening.value) / near.width) ** 2 -
        0.5 * ((amplitude(shape.structure) - structure) / near.structure) ** 2,
    );

  const largest = WIDEST_WALK *
    (Math.sqrt(length / (2 * correlationLength)) + Math.sqrt(2 * correlationLength / length)) /
    length;
  const bySd = new Float64Array(STEPS + 1);
  bySd[0] = likelihood(own.shape);
  let [kept, keptSquared] = [bySd[0], bySd[0]];
  for (let guide = 0; guide < GUIDES; guide++) {
    const unit = stepPhases(realiseMismatch(
      { start: envelope.start, length, sd: 1, correlationLength },
      randomFrom(`mismatch spread|${guide}`),
    ));
    for (let k = 1; k <= STEPS; k++) {
      const { shape, height: there } = sampled(unit.map((t) => t * largest * k / STEPS));
      const weight = likelihood(shape) / GUIDES;
      bySd[k]! += weight;
      kept += weight * there / height;
      keptSquared += weight * (there / height) ** 2;
    }
  }
  const total = sum(bySd);
  const best = Math.max(...bySd);
  const text = `tuning curve ${broadening.value.toFixed(4)} times as wide as the guide's own, u ${
    broadening.u.toFixed(4)
  }, with ${(100 * structure).toFixed(1)} % of structure beside it`;
  if (!(best > UNEXPLAINED / GUIDES)) {
    return {
      refused: `${text}: no spread with a correlation of ${correlationLength} m looks so`,
      below: null,
    };
  }
  const sdAt = (k: number) => largest * k / STEPS;
  if (bySd[0] > Math.exp(-TOLD) * best) {
    const below = (share: number): number => {
      let [k, held] = [0, bySd[0]!];
      while (held < share * total) held += bySd[++k]!;
      return sdAt(Math.max(1, k));
    };
    return {
      refused: `${text}: as without a spread, which is below ${below(0.95).toPrecision(2)} 1/m (P = 0.95)`,
      below: below(0.683),
    };
  }
  const mean = bySd.reduce((s, w, k) => s + w * sdAt(k), 0) / total;
  const variance = bySd.reduce((s, w, k) => s + w * (sdAt(k) - mean) ** 2, 0) / total;
  // A step of the list more or less is not told apart.
  const u = Math.hypot(Math.sqrt(variance), sdAt(1) / Math.sqrt(12));
  const share = kept / total;
  const peakKept = { value: share, u: Math.sqrt(Math.max(0, keptSquared / total - share * share)) };
  return { sd: { value: mean, u }, broadening, structure, peakKept };
}

const sum = (values: Float64Array): number => values.reduce((a, b) => a + b, 0);
