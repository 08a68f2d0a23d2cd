import { type Estimate, inherit, type Observation, type Pool } from "../../models/pooling/mod.ts";
import { coatedReflectivity, isRefused, nearestReading } from "../../models/metrology/mod.ts";
import type { FacetTrait, UsedTrait } from "../../models/decision/mod.ts";
import { InputError } from "../../shared/errors.ts";
import type { DefaultTrait, Platform } from "../../shared/schemas/platform.ts";
import { nm } from "../../shared/units.ts";
import type { Polarisation } from "../../shared/vocabulary.ts";
import type { GuideRecord, LotDesign } from "../records.ts";
import { defaultOf, spreadOf } from "./platform_defaults.ts";
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
}

/** How far (as a share of it) a reading's wavelength may be from where it is used. */
const WITHIN = 0.05;

type PooledTrait = Extract<TraitName, DefaultTrait>;

/** Traits of every guide of a lot: its own readings, else its die's, wafer's, lot's, else the platform's. */
export class TraitPools {
  readonly #pools = new Map<string, { pool: Pool; describe: (used: readonly number[]) => UsedRows }>();
  readonly #byTrait = new Map<TraitName, number[]>();
  readonly #byUnit = new Map<string, number[]>();

  constructor(readonly platform: Platform, readonly design: LotDesign, readonly rows: readonly TraitRow[]) {
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
    const key = `${trait}|${wavelength_nm}|${polarisation}|${process}`;
    const fallback = defaultOf(this.platform, trait, polarisation);
    let held = this.#pools.get(key);
    if (held === undefined) {
      held = this.#make(trait, wavelength_nm, polarisation, process);
      this.#pools.set(key, held);
    }
    let estimate: Estimate;
    try {
      estimate = held.pool.estimate({
        wafer: guide.wafer,
        die: guide.die_id,
        guide: guide.guide_id,
        widthUm: guide.width_um,
      });
    } catch (error) {
      if (error instanceof RangeError && fallback === null) return null;
      throw error;
    }
    const { value, u, basis, from, used, otherWidth } = estimate;
    const { distance, list } = held.describe(used);
    return {
      value,
      u,
      basis,
      key: basis === "platform" ? `${key}|platform` : `${trait}|${polarisation}|${process}|${from}|${list}`,
      trait,
      polarisation,
      wavelength_nm,
      distance,
      from,
      used,
      otherWidth,
    };
  }

  #make(
    trait: PooledTrait,
    wavelength_nm: number | null,
    polarisation: Polarisation | null,
    process: string | null,
  ) {
    const distances = new Map<number, number>();
    const observations: Observation[] = [];
    for (const units of this.#unitByUnit(trait, polarisation, process)) {
      for (const [k, scale, distance] of chosen(this.rows, units, wavelength_nm, scales(trait))) {
        const row = this.rows[k]!;
        if (distance !== null) distances.set(k, distance);
        observations.push({
          wafer: row.wafer!,
          ...(row.die_id === null ? {} : { die: row.die_id }),
          ...(row.guide_id === null ? {} : { guide: row.guide_id }),
          ...(row.width_um === null ? {} : { widthUm: row.width_um }),
          value: row.value * scale,
          u: row.u * scale,
          index: k,
        });
      }
    }
    const weighed = trait === "merged" ? withSharedU(observations) : observations;
    const fallback = defaultOf(this.platform, trait, polarisation);
    const at = fallback?.at_nm ?? null;
    const carried = fallback === null ? null : {
      value: fallback.value *
        (scales(trait) && at !== null && wavelength_nm !== null ? wavelength_nm / at : 1),
      u: fallback.u * (scales(trait) && at !== null && wavelength_nm !== null ? wavelength_nm / at : 1),
      from: this.platform.platform,
    };
    return {
      pool: inherit(weighed, spreadOf(this.platform, trait, fallback), carried, this.design.lot.lot),
      describe: describer(distances),
    };
  }

  /** Rows of a trait, polarisation and process, unit by unit. */
  #unitByUnit(trait: TraitName, polarisation: Polarisation | null, process: string | null): number[][] {
    const units = new Map<string, number[]>();
    for (const k of this.positions(trait)) {
      const row = this.rows[k]!;
      if (row.polarisation !== polarisation || row.process !== process) continue;
      const held = units.get(row.unit);
      if (held === undefined) units.set(row.unit, [k]);
      else held.push(k);
    }
    return [...units.values()];
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

  /**
   * The output facet of a guide at a wavelength (nm): bare, or coated with the run's spectrum, or coated with the platform's
   * default where the spectrum does not reach. Facets are known by the die's coating record: basis `die`.
   */
  outputFacet(
    guide: GuideRecord,
    wavelength_nm: number,
    polarisation: Polarisation,
  ): { facet: FacetTrait; resolved: ResolvedTrait | null } {
    const coating = this.design.coatingOf.get(`${guide.die_id}|out`);
    if (coating === undefined) return { facet: { state: "bare", basis: "die" }, resolved: null };
    const unit = `${coating.coating_run}|out`;
    const positions = this.positions("reflectivity", unit);
    const readings = positions.map((k) => this.rows[k]!)
      .map((r) => ({ lambda: nm(r.wavelength_nm!), reflectivity: r.value, u: r.u }));
    const found = coatedReflectivity(readings, nm(wavelength_nm));
    const common = { trait: "reflectivity" as const, polarisation: null, wavelength_nm, otherWidth: false };
    if (!isRefused(found)) {
      const used = found.used.map((k) => positions[k]!);
      const resolved: ResolvedTrait = {
        ...common,
        value: found.value,
        u: found.u,
        basis: "die",
        key: `reflectivity|${unit}|${wavelength_nm}`,
        distance: null,
        from: coating.coating_run,
        used,
      };
      return { facet: { state: "coated", reflectivity: resolved }, resolved };
    }
    const fallback = defaultOf(this.platform, "coated_reflectivity", polarisation);
    if (fallback === null) {
      throw new InputError(
        `Platform ${this.platform.platform} gives no default for coated_reflectivity, and coating run ` +
          `${coating.coating_run} says nothing at ${
            wavelength_nm.toFixed(1)
          } nm (${found.refused}): add it to "defaults"`,
        { column: "defaults.coated_reflectivity" },
      );
    }
    const resolved: ResolvedTrait = {
      ...common,
      value: fallback.value,
      u: fallback.u,
      basis: "platform",
      key: `reflectivity|platform|${wavelength_nm}|${polarisation}`,
      distance: null,
      from: this.platform.platform,
      used: [],
    };
    return { facet: { state: "coated", reflectivity: resolved }, resolved };
  }

  /**
   * Offset of Δβ for a process near a fundamental wavelength (nm). A scan of the guide itself counts as it is; scans of other
   * guides only where the platform says how far its calculation may be off. Null: no scan and no such default.
   */
  offset(guide: GuideRecord, processKey: string, fundamental_nm: number): ResolvedTrait | null {
    const found = this.estimate("mismatch_offset_per_m", guide, fundamental_nm, null, processKey);
    if (found === null || found.basis === "measured") return found;
    return defaultOf(this.platform, "mismatch_offset_per_m", null) === null ? null : found;
  }
}

/**
 * The u of a share of rare events goes with the share itself: weighed by 1/u², guides that happened to count none would
 * outweigh all others. Within a wafer every guide's share gets the root mean square of their u, so that all weigh alike.
 */
function withSharedU(observations: readonly Observation[]): Observation[] {
  const byWafer = new Map<string, { squares: number; count: number }>();
  for (const { wafer, u } of observations) {
    const { squares, count } = byWafer.get(wafer) ?? { squares: 0, count: 0 };
    byWafer.set(wafer, { squares: squares + u * u, count: count + 1 });
  }
  return observations.map((o) => {
    const { squares, count } = byWafer.get(o.wafer)!;
    return { ...o, u: Math.sqrt(squares / count) };
  });
}

/**
 * What is told of the rows that an estimate used: the farthest one's distance in wavelength, and all their distances as text.
 * With the unit they name the readings whatever else the lot holds: seeds made of positions would move with every new file.
 */
interface UsedRows {
  readonly distance: number | null;
  readonly list: string;
}

/** Describes lists of rows; once each: a whole lot inherits from one list of thousands. */
function describer(distances: ReadonlyMap<number, number>): (used: readonly number[]) => UsedRows {
  const held = new WeakMap<readonly number[], UsedRows>();
  return (used) => {
    let rows = held.get(used);
    if (rows === undefined) {
      const distance = used.reduce<number | null>((far, k) => {
        const d = distances.get(k);
        return d === undefined ? far : far === null || Math.abs(d) > Math.abs(far) ? d : far;
      }, null);
      rows = { distance, list: [...new Set(used.map((k) => distances.get(k) ?? 0))].sort().join(",") };
      held.set(used, rows);
    }
    return rows;
  };
}

function append<K>(map: Map<K, number[]>, key: K, k: number): void {
  const held = map.get(key);
  if (held === undefined) map.set(key, [k]);
  else held.push(k);
}

/** A mode's size goes with the wavelength; a loss does not. */
const scales = (trait: TraitName): boolean => trait === "mfd_x_um" || trait === "mfd_y_um";

/** Of one unit's rows those nearest in wavelength: position, factor on value and u, signed distance. */
function chosen(
  rows: readonly TraitRow[],
  unit: readonly number[],
  wavelength_nm: number | null,
  scaled: boolean,
): [position: number, scale: number, distance: number | null][] {
  if (wavelength_nm === null) return unit.map((k) => [k, 1, null]);
  const near = nearestReading(
    unit.map((k) => ({ lambda: nm(rows[k]!.wavelength_nm!) })),
    nm(wavelength_nm),
    WITHIN,
  );
  if (near === null) return [];
  return near.repeats.map((r) => {
    const k = unit[r]!;
    return [k, scaled ? wavelength_nm / rows[k]!.wavelength_nm! : 1, near.distance];
  });
}
