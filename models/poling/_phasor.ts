// Pure: no I/O, no clock, no hidden randomness.

/** Adding and subtracting 1.5·2^52 rounds a double below 2^51 to the nearest integer. */
const ROUND = 6755399441055744;

/**
 * re_j = size_j·cos(phase_j), im_j = size_j·sin(phase_j) for the first `count` entries, to 1e-11·size for phases below
 * 1e5 rad (the library functions take half the time of a whole transform). The phase is brought to ±π/2 by multiples of
 * π, then come the Taylor series up to r¹⁵ and r¹⁶: (π/2)¹⁷/17! = 6e-12. `re` may be `size`, `im` may be `phase`.
 */
export function phasorsInto(
  size: Float64Array,
  phase: Float64Array,
  count: number,
  re: Float64Array,
  im: Float64Array,
): void {
  for (let j = 0; j < count; j++) {
    const turns = (phase[j]! / Math.PI + ROUND) - ROUND;
    const r = phase[j]! - turns * Math.PI;
    const s = (turns & 1) === 0 ? size[j]! : -size[j]!;
    const q = r * r;
    re[j] = s * (1 + q * (-1 / 2 + q * (1 / 24 + q * (-1 / 720 + q * (1 / 40320 + q * (-1 / 3628800 +
                          q * (1 / 479001600 + q * (-1 / 87178291200 + q / 20922789888000))))))));
    im[j] = s * r * (1 + q * (-1 / 6 + q * (1 / 120 + q * (-1 / 5040 + q * (1 / 362880 + q * (-1 / 39916800 +
                          q * (1 / 6227020800 - q / 1307674368000)))))));
  }
}
