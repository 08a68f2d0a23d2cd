// Pure: no I/O, no clock, no hidden randomness.

/** Half the phase ΔβL/2 at half maximum: sinc²(HALF) = ½; 4·HALF = 5.566229513 is the full width in ΔβL. */
export const HALF_MAXIMUM = 1.391_557_378_251_510_2;

/** sinc²(v) = (sin v/v)² and its derivative. */
export function sincSquared(v: number): [value: number, slope: number] {
  if (Math.abs(v) < 1e-3) {
    // 1 − v²/3 + 2v⁴/45: the next terms are below rounding, the quotient's difference would cancel
    const v2 = v * v;
    return [1 - v2 / 3 * (1 - 2 * v2 / 15), -2 * v / 3 * (1 - 4 * v2 / 15)];
  }
  const s = Math.sin(v) / v;
  return [s * s, 2 * s * (Math.cos(v) - s) / v];
}
