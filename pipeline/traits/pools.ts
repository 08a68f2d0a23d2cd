import {
  type Contradiction,
  type Estimate,
  type HierarchicalPool,
  type InformationShares,
  inherit,
  type Pool,
  pools,
  type Spread,
} from "../../models/pooling/mod.ts";
import type { UsedTrait } from "../../models/decision/mod.ts";
import { InputError } from "../../shared/errors.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { Polarisation } from "../../shared/vocabulary.ts";
import type { GuideRecord, LotDesign } from "../records.ts";
import { type OutputFacet, outputFacetOf } from "./output_facet.ts";
import { defaultOf, spreadOf } from "./platform_defaults.ts";
import {
  describer,
  observationOf,
  ownReadings,
  readingsNear,
  scalesWithWavelength,
  type UsedRows,
  withSharedU,
} from "./pool_observations.ts";
import { BOUNDS, type PooledTrait, SKEW, unstatedSpread, WITHIN_LOT } from "./pool_settings.ts";
import { type OtherLot, type Places, placesOf } from "./pooled_lots.ts";
import type { TraitName, TraitRow } from "./trait_row.ts";

/** A trait as one guide uses it, and how it came about. */
export interface ResolvedTrait extends UsedTrait {
  readonly trait: TraitName;
  readonly polarisation: Polarisation | null;
  /** Where it is used, nm; null for traits without a wavelength. */
  readonly wavelength_nm: number | null;
  /** Farthest reading used, (λ_reading − λ)/λ; null when none was used. */
  readonly distance: number | null;
  readonly from: string;
  /** Positions in the list of trait rows. */
  readonly used: readonly number[];
  readonly otherWidth: boolean;
  /** Where the value comes from; null where it is not pooled. */
  readonly shares: InformationShares | null;
}

/** A reading, or all readings of one unit, that the others of its trait contradict; it is in use all the same. */
export interface ContradictingReading extends Omit<Contradiction, "readings"> {
  readonly trait: PooledTrait;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly process: string | null;
  /** Positions in the list of trait rows. */
  readonly used: readonly number[];
}

interface Held {
  readonly pool: HierarchicalPool;
  /** Guides' own readings as they are, where these outrank what the others suggest. */
  readonly own: Pool;
  /** What the platform says of the spreads. */
  readonly prior: Spread;
  readonly describe: (used: readonly number[]) => UsedRows;
}

/**
 * Traits of every guide of a lot, from its own readings and those of the guides, dies, wafers and lots around it: the
 * hierarchical model of models/pooling over all lots of the platform.
 */
export class TraitPools {
  readonly #pools = new Map<string, Held>();
  readonly #byTrait = new Map<TraitName, number[]>();
  readonly #byUnit = new Map<string, number[]>();
  #places: Places | null = null;

  constructor(
    readonly platform: Platform,
    readonly design: LotDesign,
    readonly rows: readonly TraitRow[],
    readonly others: readonly OtherLot[] = [],
  ) {
    rows.forEach((row, k) => {
      append(this.#byTrait, row.trait, k);
      append(this.#byUnit, `${row.trait}|${row.unit}`, k);
    });
  }

  /** Positions of the rows of one trait; of one unit (full id), if given. */
  positions(trait: TraitName, unit?: string): readonly number[] {
    return (unit === undefined ? this.#byTrait.get(trait) : this.#byUnit.get(`${trait}|${unit}`)) ?? [];
  }

  /**
   * A pooled trait of a guide; at a wavelength (nm) and polarisation for loss and mode sizes, which take the nearest
   * reading of the same polarisation within ±5 % (mode sizes scaled with it).
   * @returns null when there is neither a reading nor a default
   */
  estimate(
    trait: PooledTrait,
    guide: GuideRecord,
    wavelength_nm: number | null,
    polarisation: Polarisation | null,
    process: string | null = null,
  ): ResolvedTrait | null {
    const held = this.#held(trait, wavelength_nm, polarisation, process);
    return this.#resolved(held.pool, held, trait, guide, wavelength_nm, polarisation, process);
  }

  #resolved(
    pool: Pool | HierarchicalPool,
    { describe }: Held,
    trait: PooledTrait,
    guide: GuideRecord,
    wavelength_nm: number | null,
    polarisation: Polarisation | null,
    process: string | null,
  ): ResolvedTrait | null {
    let estimate: Estimate & { readonly shares?: InformationShares | null };
    try {
      estimate = pool.estimate({
        wafer: guide.wafer,
        die: guide.die_id,
        guide: guide.guide_id,
        widthUm: guide.width_um,
      });
    } catch (error) {
      if (error instanceof RangeError && defaultOf(this.platform, trait, polarisation) === null) return null;
      throw error;
    }
    const { value, u, basis, from, used, otherWidth, shares } = estimate;
    const { distance, list } = describe(used);
    return {
      value,
      u,
      basis,
      key: basis === "platform"
        ? `${poolKey(trait, wavelength_nm, polarisation, process)}|platform`
        : `${trait}|${polarisation}|${process}|${from}|${list}`,
      trait,
      polarisation,
      wavelength_nm,
      distance,
      from,
      used,
      otherWidth,
      shares: shares ?? null,
    };
  }

  /**
   * Offset of Δβ that the lot's guides have on the whole for a process, 1/m: how far the platform's calculation is off. Null
   * where the platform does not say how far that may be, or nobody scanned.
   */
  usualOffset(processKey: string, fundamental_nm: number): number | null {
    const trait = "mismatch_offset_per_m";
    if (defaultOf(this.platform, trait, null) === null) return null;
    return this.#held(trait, fundamental_nm, null, processKey).pool.usual()?.value ?? null;
  }

  /** Readings of the lot that contradict the others of their trait, as it is pooled at a wavelength. */
  contradictions(
    trait: PooledTrait,
    wavelength_nm: number | null,
    polarisation: Polarisation | null,
    process: string | null = null,
  ): ContradictingReading[] {
    if (SKEW.includes(trait)) return [];
    const { pool } = this.#held(trait, wavelength_nm, polarisation, process);
    return pool.contradictions().map(({ readings, ...rest }) => ({
      ...rest,
      trait,
      wavelength_nm,
      polarisation,
      process,
      used: readings,
    }));
  }

  #held(
    trait: PooledTrait,
    wavelength_nm: number | null,
    polarisation: Polarisation | null,
    process: string | null,
    without: string | null = null,
  ): Held {
    const key = `${poolKey(trait, wavelength_nm, polarisation, process)}|${without}`;
    let held = this.#pools.get(key);
    if (held === undefined) {
      held = this.#make(trait, wavelength_nm, polarisation, process, without);
      this.#pools.set(key, held);
    }
    return held;
  }

  #make(
    trait: PooledTrait,
    wavelength_nm: number | null,
    polarisation: Polarisation | null,
    process: string | null,
    without: string | null,
  ): Held {
    const { lot } = this.design.lot;
    const asked = { wavelength_nm, polarisation, process };
    const own = readingsNear(this.rows, this.positions(trait), asked)
      .filter(({ row }) => without === null || row.guide_id !== without);
    const others = WITHIN_LOT.includes(trait) ? [] : this.others.flatMap((other) => {
      const all = other.rows.flatMap((row, k) => row.trait === trait ? [k] : []);
      // Their readings are never among those that an estimate of this lot names.
      return readingsNear(other.rows, all, asked).map((near) => observationOf(near, other.lot, -1));
    });
    const all = [...own.map((near) => observationOf(near, lot, near.position)), ...others];
    const observations = trait === "merged" ? withSharedU(all) : all;
    const fallback = defaultOf(this.platform, trait, polarisation);
    const at = fallback?.at_nm ?? null;
    const carry = scalesWithWavelength(trait) && at !== null && wavelength_nm !== null
      ? wavelength_nm / at
      : 1;
    const carried = fallback === null ? null : {
      value: fallback.value * carry,
      u: fallback.u * carry,
      from: this.platform.platform,
    };
    const spread = fallback === null && this.platform.priors[trait] === undefined
      ? unstatedSpread(observations, all)
      : spreadOf(this.platform, trait, fallback);
    const scaled = {
      lotSd: spread.lotSd * carry,
      waferSd: spread.waferSd * carry,
      dieSd: spread.dieSd * carry,
      guideSd: spread.guideSd * carry,
    };
    const bounds = BOUNDS[trait];
    return {
      pool: pools(observations, this.places(), scaled, carried, bounds === undefined ? {} : { bounds })(lot),
      own: inherit(ownReadings(own, lot), scaled, carried, lot),
      prior: scaled,
      describe: describer(own),
    };
  }

  /** Centres of all dies that readings may be of. */
  places(): Places {
    return this.#places ??= new Map([
      ...placesOf(this.design.guides ?? []),
      ...this.others.flatMap((o) => [...o.places]),
    ]);
  }

  /** The same as {@link estimate}; a trait that nothing is known of is an error of the platform file. */
  need(
    trait: PooledTrait,
    guide: GuideRecord,
    wavelength_nm: number | null,
    polarisation: Polarisation | null,
  ): ResolvedTrait {
    const found = this.estimate(trait, guide, wavelength_nm, polarisation);
    if (found !== null) return found;
    throw new InputError(
      `Platform ${this.platform.platform} gives no default for ${trait}${
        polarisation === null ? "" : ` (${polarisation})`
      }, ` +
        `and nothing was read for ${guide.guide_id}: add it to "defaults"`,
      { column: `defaults.${trait}` },
    );
  }

  /** {@link outputFacetOf} this lot. */
  outputFacet(guide: GuideRecord, wavelength_nm: number, polarisation: Polarisation): OutputFacet {
    return outputFacetOf(this, guide, wavelength_nm, polarisation);
  }

  /**
   * Offset of Δβ for a process near a fundamental wavelength (nm). A scan of the guide itself counts as it is; scans of other
   * guides only where the platform says how far its calculation may be off. Null: no scan and no such default.
   */
  offset(guide: GuideRecord, processKey: string, fundamental_nm: number): ResolvedTrait | null {
    const trait = "mismatch_offset_per_m";
    const held = this.#held(trait, fundamental_nm, null, processKey);
    const found = this.#resolved(held.pool, held, trait, guide, fundamental_nm, null, processKey);
    if (found?.basis === "measured") {
      return this.#resolved(held.own, held, trait, guide, fundamental_nm, null, processKey);
    }
    return defaultOf(this.platform, trait, null) === null ? null : found;
  }

  /** {@link offset} as it would be without the guide's own scans; null where it then is the calculated one. */
  expectedOffset(guide: GuideRecord, processKey: string, fundamental_nm: number): ResolvedTrait | null {
    const trait = "mismatch_offset_per_m";
    if (defaultOf(this.platform, trait, null) === null) return null;
    const held = this.#held(trait, fundamental_nm, null, processKey, guide.guide_id);
    return this.#resolved(held.pool, held, trait, guide, fundamental_nm, null, processKey);
  }

  /** Standard deviations between lots, wafers, dies and guides of a trait without wavelength: as learned, else the platform's. */
  spreads(trait: PooledTrait): Spread {
    const { pool, prior } = this.#held(trait, null, null, null);
    if (pool.spreads === null) return prior;
    const { lot, wafer, die, guide } = pool.spreads;
    return { lotSd: lot.value, waferSd: wafer.value, dieSd: die.value, guideSd: guide.value };
  }
}

const poolKey = (
  trait: TraitName,
  wavelength_nm: number | null,
  polarisation: Polarisation | null,
  process: string | null,
): string => `${trait}|${wavelength_nm}|${polarisation}|${process}`;

function append<K>(map: Map<K, number[]>, key: K, k: number): void {
  const held = map.get(key);
  if (held === undefined) map.set(key, [k]);
  else held.push(k);
}
