// Pure: no I/O, no clock, no hidden randomness.
import { xoroshiro128plusFromState } from "pure-rand/generator/xoroshiro128plus";
import { uniformFloat64 } from "pure-rand/distribution/uniformFloat64";

/** A seeded stream of random numbers: the same seed gives the same numbers on every machine. */
export interface Random {
  /** Uniform in [0, 1). */
  uniform(): number;
  /** Standard normal. */
  normal(): number;
  /** Uniform integer in 0 … n−1. */
  below(n: number): number;
}

/** 32-bit FNV-1a hash of a text (Fowler, Noll & Vo; RFC 9923), with a final avalanche so that near texts differ. */
export function seedOf(text: string): number {
  return hash(text, 0x811c9dc5);
}

function hash(text: string, basis: number): number {
  let h = basis;
  for (let i = 0; i < text.length; i++) {
    h = Math.imul(h ^ text.charCodeAt(i), 0x01000193);
  }
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) | 0;
}

/**
 * The generator's 128 bits from a seed. A seed used as it is would show in the first numbers, so each word is a hash of
 * its own: of the text with four bases, or of the number by the finalizer of splitmix32.
 */
function stateOf(seed: number | string): [number, number, number, number] {
  if (typeof seed === "string") {
    const word = (basis: number) => hash(seed, basis);
    return [word(0x811c9dc5), word(0x9e3779b9), word(0x85ebca6b), word(0xc2b2ae35) | 1];
  }
  let x = seed | 0;
  const next = () => {
    x = (x + 0x9e3779b9) | 0;
    let z = x ^ (x >>> 16);
    z = Math.imul(z, 0x21f0aaad);
    z ^= z >>> 15;
    z = Math.imul(z, 0x735a2d97);
    return z ^ (z >>> 15);
  };
  // The generator must not start from all zeros.
  return [next(), next(), next(), next() | 1];
}

/**
 * A stream from a seed (xoroshiro128+). A text seed (`"K07-1/05/g12|heralded-1582"`) gives every guide its own
 * stream, so results do not depend on the order or the number of workers.
 */
export function randomFrom(seed: number | string): Random {
  const generator = xoroshiro128plusFromState(stateOf(seed));
  let spare = NaN;
  const uniform = () => uniformFloat64(generator);
  return {
    uniform,
    normal() {
      if (!Number.isNaN(spare)) {
        const kept = spare;
        spare = NaN;
        return kept;
      }
      // Box & Muller, Ann. Math. Stat. 29, 610 (1958); 1 − u keeps the logarithm finite.
      const r = Math.sqrt(-2 * Math.log(1 - uniform()));
      const angle = 2 * Math.PI * uniform();
      spare = r * Math.sin(angle);
      return r * Math.cos(angle);
    },
    below(n) {
      if (!Number.isSafeInteger(n) || n < 1) {
        throw new RangeError(`Cannot draw below ${n}: need an integer >= 1`);
      }
      return Math.floor(uniform() * n);
    },
  };
}
