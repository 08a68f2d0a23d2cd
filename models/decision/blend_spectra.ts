// Pure: no I/O, no clock, no hidden randomness.
import { given, type Outcome, type PairSpectrum } from "../pairs/mod.ts";

/**
 * A spectrum known to full accuracy at one draw (`fine`), carried to another draw by the ratio of two coarse ones:
 * fine·at/base, number by number. Whatever the coarse grid errs by cancels to first order.
 */
export function carried(fine: PairSpectrum, base: PairSpectrum, at: PairSpectrum): PairSpectrum {
  return combined(fine, base, at, (f, b, a) => b === 0 ? a : f * a / b);
}

/**
 * Between two spectra: t = 0 gives `a`, 1 gives `b`. Linear in the logarithm of each number, as loss acts on them. For a
 * grating whose spectrum depends on a single smooth trait.
 */
export function between(a: PairSpectrum, b: PairSpectrum, t: number): PairSpectrum {
  return combined(a, a, b, (x, _, y) => x > 0 && y > 0 ? x * (y / x) ** t : x + t * (y - x));
}

type Rule = (first: number, second: number, third: number) => number;

function combined(x: PairSpectrum, y: PairSpectrum, z: PairSpectrum, rule: Rule): PairSpectrum {
  const outcome = (pick: (s: PairSpectrum) => Outcome): Outcome => {
    const [p, q, r] = [pick(x), pick(y), pick(z)];
    return p.value === null || q.value === null || r.value === null
      ? r
      : given(rule(p.value, q.value, r.value));
  };
  // A share that is all but 1 on two grids may come out a rounding above it.
  const share = (pick: (s: PairSpectrum) => Outcome): Outcome => {
    const found = outcome(pick);
    return found.value === null ? found : given(Math.min(1, found.value));
  };
  const { shares, correlation } = x;
  return {
    ...x,
    made: rule(x.made, y.made, z.made),
    madeOpen: rule(x.madeOpen, y.madeOpen, z.madeOpen),
    shares: shares === null || y.shares === null || z.shares === null ? z.shares : {
      signal: Math.min(1, rule(shares.signal, y.shares.signal, z.shares.signal)),
      idler: Math.min(1, rule(shares.idler, y.shares.idler, z.shares.idler)),
      both: Math.min(1, rule(shares.both, y.shares.both, z.shares.both)),
      signalGivenIdler: share((s) => s.shares!.signalGivenIdler),
      idlerGivenSignal: share((s) => s.shares!.idlerGivenSignal),
    },
    purity: share((s) => s.purity),
    correlation: correlation === null || y.correlation === null || z.correlation === null ? z.correlation : {
      trace: rule(correlation.trace, y.correlation.trace, z.correlation.trace),
      traceFiltered: rule(
        correlation.traceFiltered,
        y.correlation.traceFiltered,
        z.correlation.traceFiltered,
      ),
      heralds: rule(correlation.heralds, y.correlation.heralds, z.correlation.heralds),
      square: rule(correlation.square, y.correlation.square, z.correlation.square),
      squareHalf: rule(correlation.squareHalf, y.correlation.squareHalf, z.correlation.squareHalf),
      squareFiltered: rule(
        correlation.squareFiltered,
        y.correlation.squareFiltered,
        z.correlation.squareFiltered,
      ),
    },
    exchange: share((s) => s.exchange),
    bandwidthS: outcome((s) => s.bandwidthS),
    bandwidthI: outcome((s) => s.bandwidthI),
  };
}
