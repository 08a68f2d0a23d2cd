// Pure: no I/O, no clock, no hidden randomness.
import type { GramMoments } from "./gram.ts";
import { ratio } from "./schmidt.ts";

/**
 * What both correlation functions are made of, all in pairs: F scaled to Tr FF† = n̄, C = t_sFt_i, N_s = t_sFF†t_s.
 * From {@link GramMoments}, and `heralds` = Tr N_i = ∬|F|²T_i, over every signal that the heralds may come from.
 */
export interface CorrelationTerms extends GramMoments {
  readonly heralds: number;
}

/** Unheralded g2 of the signal arm: 1 + P(t_sF), thermal light of 1/P modes. */
export const g2Unheralded = (terms: CorrelationTerms): number => 1 + ratio(terms.square, terms.trace);

/**
 * g2 of the signal heralded by an on/off detector on the idler, to first order in the number of pairs:
 *
 *   { 2·[Tr CC†·Tr N_s + Tr CC†N_s] − η·[(Tr CC†)² + Tr (CC†)²] }·Tr N_i / (Tr CC†)².
 *
 * The first bracket counts herald photons, the second takes back the clicks that two of them would have made: two
 * photons click with 1 − (1−ηT)(1−ηT′) = ηT + ηT′ − η²TT′. Without idler filter CC† = N_s and this is
 * (2−η)·Tr N_i·[…]/(Tr CC†)²; without filters n̄(1+P)(2−η). Behind a narrow idler filter two herald photons are rare,
 * and η no longer matters.
 * @param eta chance that an idler photon which passes its filter makes a click, 0…1
 * @throws RangeError if η is outside 0…1 or the filters pass no pairs
 */
export function g2Heralded(terms: CorrelationTerms, eta: number): number {
  const { trace, traceFiltered, squareHalf, squareFiltered, heralds } = terms;
  if (!(eta >= 0 && eta <= 1)) throw new RangeError(`Cannot take g2: found η = ${eta}, need 0…1`);
  if (!(traceFiltered > 0)) {
    throw new RangeError("Cannot take g2: found no pair behind the filters, need some");
  }
  const counted = 2 * (traceFiltered * trace + squareHalf);
  const doubled = traceFiltered * traceFiltered + squareFiltered;
  return (counted - eta * doubled) * heralds / (traceFiltered * traceFiltered);
}

/**
 * Pump power at which the heralded g2 reaches `limit`: g2 goes as n̄, and n̄ as the power.
 * @param power where g2 was computed; the answer has its unit
 */
export function powerAtG2(limit: number, g2: number, power: number): number {
  if (!(limit > 0 && g2 > 0 && power > 0)) {
    throw new RangeError(`Cannot scale power to g2 ${limit}: found ${g2} at ${power}, need numbers > 0`);
  }
  return power * limit / g2;
}
