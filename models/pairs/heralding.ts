// Pure: no I/O, no clock, no hidden randomness.
import { absent, given, type Outcome } from "./outcome.ts";

/** Power attenuations of the three waves, 1/m. */
export interface PairLosses {
  readonly pump: number;
  readonly signal: number;
  readonly idler: number;
}

/** A stretch of guide where pairs are made, m from the input facet. */
export interface Stretch {
  readonly from: number;
  readonly to: number;
}

/** Chances that photons of a pair reach the output facet, averaged over where the pair was made. */
export interface PairSurvival {
  /** Of one arm, whatever happens to the other. */
  readonly signal: number;
  readonly idler: number;
  /** Of both. */
  readonly joint: number;
  /** Of one arm, given that the other arrives: joint / marginal of the other. */
  readonly signalGivenIdler: number;
  readonly idlerGivenSignal: number;
}

/**
 * Survival in the guide: ∫e^{−α(L_g−z)}w(z)dz / ∫w(z)dz with w = e^{−α_p z} on the poled stretches and α = α_s, α_i
 * or α_s + α_i; the conditional ones are ratios of these (Klyshko: D. N. Klyshko, Sov. J. Quantum Electron. 10, 1112
 * (1980)). Closed form, exact for any loss, 0 included.
 * @param guideLength L_g, m
 * @throws RangeError for a negative loss, no stretch, or a stretch that is empty or outside the guide
 */
export function pairSurvival(
  losses: PairLosses,
  guideLength: number,
  poled: readonly Stretch[],
): PairSurvival {
  check(losses, guideLength, poled);
  const { pump, signal, idler } = losses;
  const made = weightedTransmission(0, pump, guideLength, poled);
  const s = weightedTransmission(signal, pump, guideLength, poled);
  const i = weightedTransmission(idler, pump, guideLength, poled);
  const both = weightedTransmission(signal + idler, pump, guideLength, poled);
  return {
    signal: s / made,
    idler: i / made,
    joint: both / made,
    signalGivenIdler: both / i,
    idlerGivenSignal: both / s,
  };
}

/** Σ ∫ e^{−α(L−z)} e^{−α_p z} dz: e^{−αL + (α−α_p)·middle}·width·sinh(x)/x, x = (α−α_p)·width/2. */
function weightedTransmission(
  alpha: number,
  pump: number,
  length: number,
  poled: readonly Stretch[],
): number {
  let sum = 0;
  for (const { from, to } of poled) {
    const middle = (from + to) / 2;
    const width = to - from;
    const x = (alpha - pump) * width / 2;
    sum += width * Math.exp(-alpha * (length - middle) - pump * middle) * sinhc(x);
  }
  return sum;
}

/** sinh(x)/x; Math.sinh is accurate near 0, so only 0 itself needs care. */
const sinhc = (x: number): number => x === 0 ? 1 : Math.sinh(x) / x;

function check(losses: PairLosses, guideLength: number, poled: readonly Stretch[]): void {
  for (const [name, alpha] of Object.entries(losses)) {
    if (!(alpha >= 0 && alpha < Infinity)) {
      throw new RangeError(
        `Cannot weigh survival: found ${name} loss ${alpha} 1/m, need a finite number >= 0`,
      );
    }
  }
  if (poled.length === 0) {
    throw new RangeError("Cannot weigh survival: found no poled stretch, need at least 1");
  }
  // thermal expansion may carry the last wall a rounding beyond the facet
  const end = guideLength * (1 + 1e-9);
  for (const { from, to } of poled) {
    if (!(from >= 0 && to > from && to <= end)) {
      throw new RangeError(
        `Cannot weigh survival: found poled stretch ${from}…${to} m, need it within the guide's 0…${guideLength} m`,
      );
    }
  }
}

/**
 * The poled section less its gaps, as stretches for {@link pairSurvival}.
 * @param gaps without domains over three periods, ascending, m
 */
export function poledStretches(from: number, to: number, gaps: readonly Stretch[] = []): Stretch[] {
  const out: Stretch[] = [];
  let at = from;
  for (const gap of gaps) {
    if (gap.from > at) out.push({ from: at, to: Math.min(gap.from, to) });
    at = Math.max(at, gap.to);
  }
  if (to > at) out.push({ from: at, to });
  return out;
}

/** Factors between the pair and the click, in the order in which light meets them. */
export const BUDGET_FACTORS = ["survival", "facet", "coupling", "filter", "detector"] as const;
export type BudgetFactor = typeof BUDGET_FACTORS[number];

/** One arm's heralding efficiency: named factors and their product. */
export interface Budget {
  readonly factors: Readonly<Record<BudgetFactor, Outcome>>;
  readonly total: Outcome;
}

/**
 * The product of all factors; null, naming the first factor that is null and its reason, as soon as one is.
 * @throws RangeError for a factor outside 0…1
 */
export function assembleBudget(factors: Readonly<Record<BudgetFactor, Outcome>>): Budget {
  let product = 1;
  let missing: Outcome | null = null;
  for (const name of BUDGET_FACTORS) {
    const factor = factors[name];
    if (factor.value === null) {
      missing ??= absent(factor.reason);
      continue;
    }
    // rounding may put a ratio of equal sums just above 1
    if (!(factor.value >= 0 && factor.value <= 1 + 1e-9)) {
      throw new RangeError(`Cannot make a budget: found ${name} ${factor.value}, need 0…1`);
    }
    product *= factor.value;
  }
  return { factors, total: missing ?? given(product, "heralding efficiency") };
}

/** Klyshko's estimate from counted rates (1/s): efficiency of each arm = (C − accidentals) / singles of the other. */
export function klyshko(
  counts: {
    readonly signal: number;
    readonly idler: number;
    readonly coincidences: number;
    readonly window?: number;
  },
): { readonly signal: number; readonly idler: number; readonly accidentals: number } {
  const { signal, idler, coincidences, window = 0 } = counts;
  if (!(signal > 0 && idler > 0)) {
    throw new RangeError(
      `Cannot estimate efficiencies: found singles ${signal} and ${idler} 1/s, need both > 0`,
    );
  }
  const accidentals = signal * idler * window;
  const net = coincidences - accidentals;
  return { signal: net / idler, idler: net / signal, accidentals };
}
