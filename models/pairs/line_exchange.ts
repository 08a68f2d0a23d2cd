// Pure: no I/O, no clock, no hidden randomness.
import type { Axis } from "./axis.ts";
import { maximiseOverDelay } from "./delay.ts";
import { intersect, layLine, lineOn, passes } from "./line.ts";
import { absent, given, type Outcome } from "./outcome.ts";
import type { PairSource, PreparedSource } from "./source.ts";

/** The exchange overlap of one grating on a line that is laid, and the delay (s) where it is largest. */
export type ExchangeOnLine = (
  spectrumOn: PairSource["spectrum"],
) => { value: Outcome; delay: number | null };

/**
 * Exchange overlap of a continuous pump's pairs: max over τ of |∫C(ν)C*(−ν)e^{2iντ}dν|/∫|C|², ω_s = ω_p/2 + ν, on a grid that is its own mirror
 * image. Arms without a wavelength in common have 0.
 */
export function layExchange(prepared: PreparedSource, points: number): ExchangeOnLine {
  const { source, windowS, windowI } = prepared;
  const { omegaP } = source;
  const stated = intersect(windowS.stated, [omegaP - windowI.stated[1], omegaP - windowI.stated[0]]);
  const dark = { value: absent("no pair passes the filters"), delay: null };
  if (!(stated[1] > stated[0])) return () => dark;
  const [lo, hi] = [stated[0] - omegaP / 2, stated[1] - omegaP / 2];
  if (hi <= 0 || lo >= 0) return () => ({ value: given(0), delay: 0 });
  const half = Math.max(-lo, hi);
  const n = Math.ceil(points * 2 * half / (hi - lo));
  const step = 2 * half / n;
  // only the points inside the window are computed: the curves need not reach to its mirror image
  const inside = Array.from({ length: n }, (_, j) => omegaP / 2 - half + (j + 0.5) * step)
    .map((w, j) => ({ w, j })).filter(({ w }) => w > stated[0] && w < stated[1]);
  const omega = Float64Array.from(inside, (x) => x.w);
  const axis: Axis = {
    omega,
    weight: new Float64Array(omega.length).fill(step),
    power: omega.map((w) => passes(windowS, source.filters?.signal, w)),
    segments: [],
    capped: false,
  };
  const laid = layLine(prepared, axis);
  return (spectrumOn) => {
    const line = lineOn(prepared, laid, spectrumOn);
    const re = new Float64Array(n);
    const im = new Float64Array(n);
    let norm = 0;
    inside.forEach(({ j }, q) => {
      const t = Math.sqrt(axis.power[q]! * line.powerI[q]!);
      re[j] = t * line.re[q]!;
      im[j] = t * line.im[q]!;
      norm += re[j]! ** 2 + im[j]! ** 2;
    });
    if (!(norm > 0)) return dark;
    const swapped = exchangeLine(re, im);
    const { value, delay } = maximiseOverDelay(swapped.re, swapped.im, 2 * step);
    return { value: given(value / norm, "exchange overlap"), delay };
  };
}

/** C(ν)·C*(−ν) point by point. */
function exchangeLine(re: Float64Array, im: Float64Array): { re: Float64Array; im: Float64Array } {
  const n = re.length;
  const out = { re: new Float64Array(n), im: new Float64Array(n) };
  for (let j = 0; j < n; j++) {
    const q = n - 1 - j;
    out.re[j] = re[j]! * re[q]! + im[j]! * im[q]!;
    out.im[j] = im[j]! * re[q]! - re[j]! * im[q]!;
  }
  return out;
}
