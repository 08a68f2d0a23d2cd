// Pure: no I/O, no clock, no hidden randomness.
import { spectrumPower } from "./interpolate.ts";
import type { GratingSpectrum } from "./spectrum_setting.ts";
import { leastBetween, rootBetween, scan } from "./_search.ts";

export interface Acceptance {
  /** Full width at half maximum in x; null if the power does not fall to half on one side. */
  readonly width: number | null;
  /** x of the maximum and |φ|² there. */
  readonly peak: number;
  readonly power: number;
  /** The first x on each side of the peak with half its power; null if not reached. */
  readonly low: number | null;
  readonly high: number | null;
}

/**
 * Acceptance bandwidth: full width at half maximum of |φ(Δβ(x))|² in a scanned variable x (wavelength, temperature),
 * between the first crossings on both sides of the highest point in [lo, hi]. Give a window of a few widths: the scan
 * takes about one evaluation per sample of the spectrum that it crosses, at least 64.
 * @param deltaBeta Δβ(x), 1/m, inside the band of the spectrum
 * @throws RangeError for an empty window or a Δβ that is outside the band
 */
export function acceptance(
  s: GratingSpectrum,
  deltaBeta: (x: number) => number,
  [lo, hi]: readonly [number, number],
): Acceptance {
  if (!(Number.isFinite(lo) && Number.isFinite(hi) && lo < hi)) {
    throw new RangeError(
      `Cannot scan an acceptance from ${lo} to ${hi}: need a finite window of positive length`,
    );
  }
  const coarse = scan(deltaBeta, lo, hi, 16, "an acceptance bandwidth");
  let travelled = 0;
  for (let k = 1; k < coarse.f.length; k++) travelled += Math.abs(coarse.f[k]! - coarse.f[k - 1]!);
  // 1.5: a step that is not even in Δβ may be half as long again.
  const intervals = Math.min(20_000, Math.max(64, Math.ceil(1.5 * travelled / s.step)));
  const power = (x: number) => spectrumPower(s, deltaBeta(x));
  const samples = scan(power, lo, hi, intervals, "an acceptance bandwidth");
  let top = 0;
  for (let k = 1; k <= intervals; k++) if (samples.f[k]! > samples.f[top]!) top = k;
  const width = hi - lo;
  const from = samples.x[Math.max(0, top - 1)]!;
  const to = samples.x[Math.min(intervals, top + 1)]!;
  const least = leastBetween((x) => -power(x), from, to, 1e-10 * width);
  const half = -least.value / 2;
  const crossing = (direction: 1 | -1): number | null => {
    let inner = { x: least.x, f: -least.value };
    for (let k = top; k >= 0 && k <= intervals; k += direction) {
      const outer = { x: samples.x[k]!, f: samples.f[k]! };
      if ((outer.x - least.x) * direction <= 0) continue;
      if (outer.f <= half) {
        return rootBetween(
          (x) => power(x) - half,
          inner.x,
          outer.x,
          inner.f - half,
          outer.f - half,
          1e-12 * width,
        );
      }
      inner = outer;
    }
    return null;
  };
  const low = crossing(-1);
  const high = crossing(1);
  return {
    width: low === null || high === null ? null : high - low,
    peak: least.x,
    power: -least.value,
    low,
    high,
  };
}
