// Pure: no I/O, no clock, no hidden randomness.
import { weightedMean } from "../../shared/statistics.ts";
import type { Uncertain } from "../../shared/vocabulary.ts";
import type { Refused } from "./refusal.ts";

/** One reading of a coating run's reflectivity (power, 0…1) at a vacuum wavelength, m. */
export interface ReflectivityReading {
  readonly lambda: number;
  readonly reflectivity: number;
  readonly u: number;
}

/** A coated facet's reflectivity and the readings (positions in the list) it rests on. */
export interface CoatedReflectivity extends Uncertain {
  readonly used: readonly number[];
}

/** Readings this far apart (m) still say what is between them. */
const WIDEST_GAP = 25e-9;
/** How far beyond the outermost reading (m) the spectrum is believed. */
const FARTHEST_BEYOND = 5e-9;
/** Wavelengths closer than this (m) are one wavelength: a millionth of a nanometre absorbs the rounding of units. */
const SAME = 1e-15;

/**
 * Bare facet at normal incidence: ((n_eff − n_o)/(n_eff + n_o))² (Fresnel), with u to first order.
 * @param nEff effective index of the guided mode
 * @param outside refractive index of what is outside
 * @throws RangeError for an index below 1, or a negative u
 */
export function bareReflectivity(nEff: Uncertain, outside = 1): Uncertain {
  if (!(nEff.value >= 1 && nEff.value < Infinity) || !(nEff.u >= 0 && nEff.u < Infinity) || !(outside >= 1)) {
    throw new RangeError(
      `Cannot compute a facet's reflectivity: found indices ${nEff.value} (u ${nEff.u}) and ${outside}, need >= 1`,
    );
  }
  const sum = nEff.value + outside;
  const r = (nEff.value - outside) / sum;
  return { value: r * r, u: Math.abs(2 * r * 2 * outside / sum ** 2) * nEff.u };
}

/**
 * Reflectivity of a coated facet at λ: linear between readings at most 25 nm apart, and along the outermost such pair
 * to at most 5 nm beyond it (a lone outermost reading is held); repeats at one wavelength are averaged by weight.
 * Otherwise refused: then the platform's coated default stands, never the bare facet. u: the readings taken as
 * independent, so it grows beyond the outermost. The value is kept within 0…1.
 * @throws RangeError for a wavelength, reflectivity or u that makes no sense
 */
export function coatedReflectivity(
  readings: readonly ReflectivityReading[],
  lambda: number,
): CoatedReflectivity | Refused {
  if (!(lambda > 0 && lambda < Infinity)) {
    throw new RangeError(`Cannot look up a reflectivity at ${lambda} m: need a wavelength > 0`);
  }
  const knots = averaged(readings);
  if (knots.length === 0) return { refused: "no reflectivity was read for this coating run" };
  const at = `${nmText(lambda)} nm`;
  for (const knot of knots) if (Math.abs(knot.lambda - lambda) <= SAME) return held(knot);

  const above = knots.findIndex((knot) => knot.lambda > lambda);
  if (above > 0) {
    const [a, b] = [knots[above - 1]!, knots[above]!];
    if (b.lambda - a.lambda > WIDEST_GAP + SAME) {
      return {
        refused: `no coating reading near ${at}: the nearest are at ${nmText(a.lambda)} and ${
          nmText(b.lambda)
        } nm, over 25 nm apart`,
      };
    }
    return along(a, b, lambda);
  }
  const below = above === -1;
  const outermost = below ? knots[knots.length - 1]! : knots[0]!;
  if (Math.abs(lambda - outermost.lambda) > FARTHEST_BEYOND + SAME) {
    return {
      refused: `no coating reading near ${at}: the nearest is at ${
        nmText(outermost.lambda)
      } nm, over 5 nm away`,
    };
  }
  const next = below ? knots[knots.length - 2] : knots[1];
  if (next === undefined || Math.abs(next.lambda - outermost.lambda) > WIDEST_GAP + SAME) {
    return held(outermost);
  }
  return along(next, outermost, lambda);
}

interface Knot extends CoatedReflectivity {
  readonly lambda: number;
}

const held = ({ value, u, used }: Knot): CoatedReflectivity => ({ value, u, used });

function along(a: Knot, b: Knot, lambda: number): CoatedReflectivity {
  const t = (lambda - a.lambda) / (b.lambda - a.lambda);
  const value = a.value + t * (b.value - a.value);
  return {
    value: Math.min(1, Math.max(0, value)),
    u: Math.hypot((1 - t) * a.u, t * b.u),
    used: [...a.used, ...b.used].sort((x, y) => x - y),
  };
}

/** One knot per wavelength, ascending. */
function averaged(readings: readonly ReflectivityReading[]): Knot[] {
  const order = readings.map((_, k) => k);
  for (const { lambda, reflectivity, u } of readings) {
    if (
      !(lambda > 0 && lambda < Infinity && reflectivity >= 0 && reflectivity <= 1 && u >= 0 && u < Infinity)
    ) {
      throw new RangeError(
        `Cannot use a reflectivity of ${reflectivity}, u ${u}, at ${lambda} m: need 0…1, u >= 0, wavelength > 0`,
      );
    }
  }
  order.sort((a, b) => readings[a]!.lambda - readings[b]!.lambda || a - b);
  const knots: Knot[] = [];
  let from = 0;
  while (from < order.length) {
    const lambda = readings[order[from]!]!.lambda;
    let to = from + 1;
    while (to < order.length && readings[order[to]!]!.lambda - lambda <= SAME) to++;
    const used = order.slice(from, to).sort((a, b) => a - b);
    const mean = weightedMean(used.map((k) => ({ value: readings[k]!.reflectivity, u: readings[k]!.u })));
    knots.push({ lambda, ...mean, used });
    from = to;
  }
  return knots;
}

const nmText = (lambda: number) => String(Number((lambda * 1e9).toFixed(3)));
