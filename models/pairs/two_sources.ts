// Pure: no I/O, no clock, no hidden randomness.
import { commonAxis } from "./axis.ts";
import type { DelayMaximum } from "./delay.ts";
import type { ComplexMatrix } from "./gram.ts";
import { heraldedState, sourceOverlap } from "./interference.ts";
import { amplitudeAgainst } from "./pulsed.ts";
import { type PairSource, prepareSource } from "./source.ts";
import { type Band, NOT_SEPARABLE } from "./window.ts";

/**
 * Depth of the dip of heralded signal photons from two dies, Tr(ρ_aρ_b) at the best delay, without multiple pairs: both
 * states behind their filters on one grid over both signal windows. Multiply by {@link splitterFactor} for a real splitter.
 * @param points of that grid
 * @returns overlap 0…1, and the delay in s
 * @throws RangeError for a continuous pump, arms that are not separable or need filters, filters that pass no pair, or a
 *   source that cannot be one
 */
export function twoSourceDip(a: PairSource, b: PairSource, points = 192): DelayMaximum {
  const [pa, pb] = [prepareSource(a), prepareSource(b)];
  for (const { separable, windowS, windowI } of [pa, pb]) {
    const why = separable ? windowS.cut ?? windowI.cut : NOT_SEPARABLE;
    if (why !== null) throw new RangeError(`Cannot let two sources interfere: ${why}`);
  }
  const [wa, wb] = [pa.windowS.stated, pb.windowS.stated];
  const band: Band = [Math.min(wa[0], wb[0]), Math.max(wa[1], wb[1])];
  const state = (p: typeof pa): ComplexMatrix => {
    const signal = commonAxis(band, points, p.windowS, p.source.filters?.signal);
    const { amplitude, idler } = amplitudeAgainst(p, signal, points);
    return heraldedState(amplitude, signal.power, idler.power);
  };
  return sourceOverlap(state(pa), state(pb), (band[1] - band[0]) / points);
}
