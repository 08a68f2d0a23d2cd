// Pure: no I/O, no clock, no hidden randomness.
import { HALF_MAXIMUM, sincSquared } from "./_sinc.ts";

/** Centre and full width at half maximum, in the scan's own coordinate. */
export interface SincStart {
  readonly centre: number;
  readonly width: number;
  readonly scale: number;
  readonly offset: number;
}

const MOST_POINTS = 300;
/** Ratio of neighbouring widths, and steps of the centre within one width: near enough for a descent to take over. */
const WIDTH_RATIO = 1.25;
const STEPS_PER_WIDTH = 2.5;

/**
 * Start values for a sinc² fit on x in −1…1: a search over centre and width, scale and offset by linear least squares
 * in each. Needs no guess, and side lobes or slow drifts of the offset cannot trap it. Null if nothing rises.
 * @param x ascending
 */
export function sincStart(x: Float64Array, y: Float64Array, w: Float64Array): SincStart | null {
  const [bx, by, bw] = thinned(x, y, w);
  const n = bx.length;
  const narrowest = 2 * 2 / n; // two points of an even scan
  let best: SincStart | null = null;
  let most = 0;
  for (let width = narrowest; width <= 2; width *= WIDTH_RATIO) {
    const steps = Math.ceil(2 * STEPS_PER_WIDTH / width);
    for (let a = 0; a <= steps; a++) {
      const centre = -1 + 2 * a / steps;
      let [sw, sf, sy, sff, sfy] = [0, 0, 0, 0, 0];
      for (let k = 0; k < n; k++) {
        const f = sincSquared(2 * HALF_MAXIMUM * (bx[k]! - centre) / width)[0];
        sw += bw[k]!;
        sf += bw[k]! * f;
        sy += bw[k]! * by[k]!;
        sff += bw[k]! * f * f;
        sfy += bw[k]! * f * by[k]!;
      }
      const spread = sff - sf * sf / sw;
      const shared = sfy - sf * sy / sw;
      if (!(spread > 1e-9 * sw) || shared <= 0) continue; // flat over the scan, or a dip
      const explained = shared * shared / spread;
      if (explained > most) {
        most = explained;
        const scale = shared / spread;
        best = { centre, width, scale, offset: (sy - scale * sf) / sw };
      }
    }
  }
  return best;
}

/** Neighbours averaged until few enough remain for a search. */
function thinned(
  x: Float64Array,
  y: Float64Array,
  w: Float64Array,
): [Float64Array, Float64Array, Float64Array] {
  const bins = Math.min(MOST_POINTS, x.length);
  if (bins === x.length) return [x, y, w];
  const out: [Float64Array, Float64Array, Float64Array] = [
    new Float64Array(bins),
    new Float64Array(bins),
    new Float64Array(bins),
  ];
  for (let b = 0; b < bins; b++) {
    const from = Math.floor(b * x.length / bins);
    const to = Math.floor((b + 1) * x.length / bins);
    for (let k = from; k < to; k++) {
      out[0][b]! += w[k]! * x[k]!;
      out[1][b]! += w[k]! * y[k]!;
      out[2][b]! += w[k]!;
    }
    out[0][b]! /= out[2][b]!;
    out[1][b]! /= out[2][b]!;
  }
  return out;
}
