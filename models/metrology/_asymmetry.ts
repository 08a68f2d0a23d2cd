// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";
import { HALF_MAXIMUM } from "./_sinc.ts";
import type { SincParameters } from "./_sinc_fit.ts";

/** Side-lobe weight above less that below over the main lobe's, as `TuningFit.asymmetry` says; `sd` of one point. */
export function asymmetry(x: Float64Array, y: Float64Array, p: SincParameters, sd: number): Uncertain | null {
  const [centre, width, scale, offset] = p;
  const first = Math.PI * width / (2 * HALF_MAXIMUM); // distance of the first null
  const reach = Math.min(3 * first, centre - x[0]!, x[x.length - 1]! - centre);
  if (reach < 2 * first) return null;
  const side = (sign: number) => {
    const at: [number, number][] = [];
    for (let k = 0; k < x.length; k++) {
      const d = sign * (x[k]! - centre);
      if (d >= first && d <= reach) at.push([d, y[k]! - offset]);
    }
    at.sort((a, b) => a[0] - b[0]);
    // Each point stands for the stretch up to half-way to its neighbours; repeats share theirs.
    let [area, variance] = [0, 0];
    for (let k = 0; k < at.length; k++) {
      const before = k === 0 ? first : (at[k - 1]![0] + at[k]![0]) / 2;
      const after = k === at.length - 1 ? reach : (at[k]![0] + at[k + 1]![0]) / 2;
      area += at[k]![1] * (after - before);
      variance += ((after - before) * sd) ** 2;
    }
    return { area, variance, count: at.length };
  };
  const [above, below] = [side(1), side(-1)];
  if (above.count < 3 || below.count < 3) return null;
  // dx = (first/π)·dv
  const main = scale * first / Math.PI * 2 * SINE_INTEGRAL_2PI;
  return { value: (above.area - below.area) / main, u: Math.sqrt(above.variance + below.variance) / main };
}

/** Si(2π) = ∫₀^{2π} sin t/t dt; by parts ∫ sinc²(v) dv from −π to π is twice that. */
const SINE_INTEGRAL_2PI = 1.418_151_576_132_628_5;
