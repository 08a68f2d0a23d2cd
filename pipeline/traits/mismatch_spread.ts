import type { SpreadTraits } from "../../models/decision/mod.ts";
import { processName } from "../../models/guides/mod.ts";
import { nm, toNm } from "../../shared/units.ts";
import type { Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { GuideRecord } from "../records.ts";
import { defaultOf } from "./platform_defaults.ts";
import type { ResolvedTrait, TraitPools } from "./pools.ts";
import type { TraitName } from "./trait_row.ts";

/** Correlation length (m) at which a spread of δβ is stated; a spread means nothing without one. */
export const CORRELATION_LENGTH = 1e-3;

/** A scan of the same three polarisations this near in wavelength is one of the same process. */
const WITHIN = 0.05;

/** A trait that a spread rests on, with what is to be said of it. */
export type SpreadRole = ResolvedTrait & { readonly note: string };

/**
 * The spread of δβ along a guide. A scan of the guide itself, of whatever process, outranks all else, also where it told none;
 * of several the one of the process asked, else the one that told it best. Without a scan the platform's default speaks,
 * pooled with what scans of the same process on other guides told; without that there is no spread.
 * @returns null where nothing speaks of one; `traits` null where the guide's own scan told none
 */
export function resolveSpread(
  pools: TraitPools,
  guide: GuideRecord,
  asked: ThreeWaves,
): { readonly traits: SpreadTraits | null; readonly told: readonly SpreadRole[] } | null {
  const process = processName(asked.polP, asked.polS, asked.polI);
  const fundamental_nm = Number(toNm(2 * asked.lambdaP).toFixed(6));
  const distance = (k: number) => pools.rows[k]!.wavelength_nm! / fundamental_nm - 1;
  const own = pools.positions("mismatch_sd_per_m", guide.guide_id);
  const same = own.filter((k) => pools.rows[k]!.process === process && Math.abs(distance(k)) <= WITHIN);
  const [first, ...others] = same.length > 0 ? nearest(same, distance) : [...own].sort((a, b) => {
    const share = (k: number) =>
      pools.rows[k]!.value === 0 ? Infinity : pools.rows[k]!.u / pools.rows[k]!.value;
    return share(a) === share(b) ? a - b : share(a) - share(b);
  });
  if (first === undefined) {
    // A scan whose shape told nothing at all is a scan all the same: what others told is not this guide's.
    const scanned = pools.positions("effective_length_mm", guide.guide_id).length > 0;
    if (scanned || defaultOf(pools.platform, "mismatch_sd_per_m", null) === null) return null;
    const pooled = pools.estimate("mismatch_sd_per_m", guide, fundamental_nm, null, process);
    if (pooled === null || (pooled.value <= 0 && pooled.u === 0)) return null;
    return {
      traits: { sd: usedOf(pooled), correlationLength: CORRELATION_LENGTH, scanned: null },
      told: [{ ...pooled, note: AT }],
    };
  }
  // Repeats of one process are weighed by their u; of different processes the best one counts.
  const used = same.length > 0 ? [first, ...others] : [first];
  const row = pools.rows[first]!;
  const waves = wavesOf(row.process!, row.wavelength_nm!);
  const sd = weighed(pools, "mismatch_sd_per_m", used, distance(first));
  const of = same.length > 0 ? "" : `; told of ${row.process} at ${row.wavelength_nm!.toFixed(1)} nm`;
  if (sd.value === 0) {
    return { traits: null, told: [{ ...sd, note: `the guide's own scan tells no spread${of}` }] };
  }
  const beside = (trait: TraitName) =>
    weighed(
      pools,
      trait,
      pools.positions(trait, guide.guide_id).filter((k) => {
        const { process, wavelength_nm } = pools.rows[k]!;
        return process === row.process && used.some((n) => pools.rows[n]!.wavelength_nm === wavelength_nm);
      }),
      distance(first),
    );
  const [length, kept] = [beside("effective_length_mm"), beside("peak_kept")];
  return {
    traits: {
      sd: usedOf(sd),
      correlationLength: CORRELATION_LENGTH,
      scanned: { waves, effectiveLength: usedOf(length), peakKept: usedOf(kept) },
    },
    told: [
      { ...sd, note: `${AT}${of}` },
      { ...length, note: `of a uniform grating as wide${of}` },
      { ...kept, note: `of the peak without the spread${of}` },
    ],
  };
}

const AT = `at a correlation length of ${CORRELATION_LENGTH * 1e3} mm`;

const usedOf = ({ value, u, basis, key }: ResolvedTrait) => ({ value, u, basis, key });

/** Those at the smallest distance. */
function nearest(positions: readonly number[], distance: (k: number) => number): number[] {
  const least = Math.min(...positions.map((k) => Math.abs(distance(k))));
  return positions.filter((k) => Math.abs(distance(k)) <= least + 1e-9);
}

/** Repeats on one guide, weighed by 1/u². One that told nothing counts as 0 with its limit for u. */
function weighed(
  { rows }: TraitPools,
  trait: TraitName,
  positions: readonly number[],
  distance: number,
): ResolvedTrait {
  const first = rows[positions[0]!]!;
  const weight = (k: number) => 1 / rows[k]!.u ** 2;
  const sum = positions.reduce((s, k) => s + weight(k), 0);
  const single = positions.length === 1;
  return {
    trait,
    value: single ? first.value : positions.reduce((s, k) => s + weight(k) * rows[k]!.value, 0) / sum,
    u: single ? first.u : 1 / Math.sqrt(sum),
    basis: "measured",
    key: `${trait}|${first.process}|${first.unit}|${first.wavelength_nm}`,
    polarisation: null,
    wavelength_nm: first.wavelength_nm,
    distance,
    from: first.unit,
    used: positions,
    otherWidth: false,
    shares: null,
  };
}

/** The waves of a scanned second harmonic: process `TE>TE+TM` and its fundamental, nm. */
export function wavesOf(process: string, fundamental_nm: number): ThreeWaves {
  const [polP, polS, polI] = process.split(/[>+]/) as [Polarisation, Polarisation, Polarisation];
  const lambda = nm(fundamental_nm);
  return { lambdaP: lambda / 2, lambdaS: lambda, lambdaI: lambda, polP, polS, polI };
}
