// Pure: no I/O, no clock, no hidden randomness.
import { xoroshiro128plus } from "pure-rand/generator/xoroshiro128plus";
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
  let h = 0x811c9dc5;
  for (let i = 0; i < text.length; i++) {
    h = Math.imul(h ^ text.charCodeAt(i), 0x01000193);
  }
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) | 0;
}

/**
 * A stream from a seed (xoroshiro128+). A text seed (`"K07-1/05/g12|heralded-1582"`) gives every guide its own
 * stream, so results do not depend on the order or the number of workers.
 */
export function randomFrom(seed: number | string): Random {
  const generator = xoroshiro128plus(typeof seed === "string" ? seedOf(seed) : seed);
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
