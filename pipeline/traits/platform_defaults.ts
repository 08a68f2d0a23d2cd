import type { DefaultTrait, Platform } from "../../shared/schemas/platform.ts";
import type { Polarisation, Uncertain } from "../../shared/vocabulary.ts";
import { type Spread, spreadFromDefault } from "../../models/pooling/mod.ts";

/** A platform's stand-in for a trait that nobody read; `at_nm`: the wavelength that it belongs to. */
export interface PlatformDefault extends Uncertain {
  readonly at_nm: number | null;
}

type Given = number | { value: number; u: number; at_nm?: number | undefined };

/** A default, for one polarisation where it depends on that; null when the platform has none. */
export function defaultOf(
  platform: Platform,
  trait: DefaultTrait,
  pol: Polarisation | null,
): PlatformDefault | null {
  const given = platform.defaults[trait];
  if (given === undefined) return null;
  if (typeof given === "number" || "value" in given) return plain(given);
  const own = pol === null ? undefined : given[pol];
  return own === undefined ? null : plain(own);
}

const plain = (given: Given): PlatformDefault =>
  typeof given === "number"
    ? { value: given, u: 0, at_nm: null }
    : { value: given.value, u: given.u, at_nm: given.at_nm ?? null };

/** Prior spreads of a trait: the platform's, else shares of its default's variance. */
export function spreadOf(platform: Platform, trait: DefaultTrait, fallback: PlatformDefault | null): Spread {
  const prior = platform.priors[trait];
  if (prior === undefined) return spreadFromDefault(fallback?.u ?? 0);
  return { lotSd: prior.lot_sd, waferSd: prior.wafer_sd, dieSd: prior.die_sd, guideSd: prior.guide_sd };
}
