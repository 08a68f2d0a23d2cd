import type { LotObservation } from "../../models/pooling/mod.ts";
import { nearestReading } from "../../models/metrology/mod.ts";
import { nm } from "../../shared/units.ts";
import type { Polarisation } from "../../shared/vocabulary.ts";
import type { TraitName, TraitRow } from "./trait_row.ts";

/** How far (as a share of it) a reading's wavelength may be from where it is used. */
const WITHIN = 0.05;

/** What a trait is asked at; null where it does not depend on that. */
export interface AskedAt {
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly process: string | null;
}

/** A trait row as it counts at a wavelength. */
export interface NearReading {
  readonly row: TraitRow;
  /** Position of the row in its list. */
  readonly position: number;
  /** Factor on value and u. */
  readonly scale: number;
  /** (λ_reading − λ)/λ; null without a wavelength. */
  readonly distance: number | null;
}

/** A mode's size goes with the wavelength; a loss does not. */
export const scalesWithWavelength = (trait: TraitName): boolean =>
  trait === "mfd_x_um" || trait === "mfd_y_um";

/**
 * Rows of one polarisation and process: of each unit those nearest in wavelength within ±5 %, repeats alike; without a
 * wavelength all of them.
 */
export function readingsNear(
  rows: readonly TraitRow[],
  positions: readonly number[],
  { wavelength_nm, polarisation, process }: AskedAt,
): NearReading[] {
  const ofKind = positions.filter((k) =>
    rows[k]!.polarisation === polarisation && rows[k]!.process === process
  );
  return [...Map.groupBy(ofKind, (k) => rows[k]!.unit).values()].flatMap((unit): NearReading[] => {
    if (wavelength_nm === null) {
      return unit.map((position) => ({ row: rows[position]!, position, scale: 1, distance: null }));
    }
    const lambdas = unit.map((k) => ({ lambda: nm(rows[k]!.wavelength_nm!) }));
    const near = nearestReading(lambdas, nm(wavelength_nm), WITHIN);
    return (near?.repeats ?? []).map((r) => {
      const position = unit[r]!;
      const row = rows[position]!;
      const scale = scalesWithWavelength(row.trait) ? wavelength_nm / row.wavelength_nm! : 1;
      return { row, position, scale, distance: near!.distance };
    });
  });
}

/** A reading for the pool; of how many things, where it is a share. */
export interface CountedObservation extends LotObservation {
  readonly counted?: number;
}

/** A reading as one of many of its trait; `index` is the caller's handle on it. */
export function observationOf(
  { row, scale }: NearReading,
  lot: string,
  index: number,
  u = row.u_pooled ?? row.u,
): CountedObservation {
  return {
    lot,
    wafer: row.wafer!,
    ...(row.die_id === null ? {} : { die: row.die_id }),
    ...(row.guide_id === null ? {} : { guide: row.guide_id }),
    ...(row.width_um === null ? {} : { widthUm: row.width_um }),
    value: row.value * scale,
    u: u * scale,
    index,
    ...(row.counted === undefined || row.counted === null ? {} : { counted: row.counted }),
  };
}

/** Readings of single guides as they are, for those guides alone. */
export const ownReadings = (readings: readonly NearReading[], lot: string): LotObservation[] =>
  readings.filter(({ row }) => row.guide_id !== null)
    .map((near) => observationOf(near, lot, near.position, near.row.u));

/**
 * The u of a share of rare events goes with the share itself: weighed by 1/u², guides that happened to count none would
 * outweigh all others. Within a wafer every guide's u is that of the wafer's common share p̂ = (M + ½)/(N + 1), counted of its own
 * things: √(p̂(1 − p̂)/n).
 */
export function withSharedU(observations: readonly CountedObservation[]): LotObservation[] {
  const byWafer = new Map(
    [...Map.groupBy(observations, (o) => o.wafer)].map(([wafer, all]) => [wafer, commonShare(all)]),
  );
  return observations.map((o) => {
    const share = byWafer.get(o.wafer)!;
    return o.counted === undefined ? o : { ...o, u: Math.sqrt(share * (1 - share) / o.counted) };
  });
}

/**
 * The common share of counted readings, with half an event for what was not seen (Jeffreys; L. D. Brown, T. T. Cai &
 * A. DasGupta, Stat. Sci. 16, 101 (2001); from memory).
 */
export function commonShare(observations: readonly CountedObservation[]): number {
  let [events, things] = [0.5, 1];
  for (const { value, counted = 0 } of observations) {
    events += value * counted;
    things += counted;
  }
  return events / things;
}

/**
 * What is told of the rows that an estimate used: the farthest one's distance in wavelength, and all their wavelengths as text.
 * With the unit they name the readings whatever else the lot holds: seeds made of positions would move with every new file.
 */
export interface UsedRows {
  readonly distance: number | null;
  readonly list: string;
}

/** Describes lists of positions; once each: a whole lot inherits from one list of thousands. */
export function describer(readings: readonly NearReading[]): (used: readonly number[]) => UsedRows {
  const byPosition = new Map(readings.map((r) => [r.position, r]));
  const held = new WeakMap<readonly number[], UsedRows>();
  return (used) => {
    let rows = held.get(used);
    if (rows === undefined) {
      let distance: number | null = null;
      const wavelengths = new Set<number>();
      for (const k of used) {
        const near = byPosition.get(k)!;
        if (near.distance === null) continue;
        if (distance === null || Math.abs(near.distance) > Math.abs(distance)) distance = near.distance;
        wavelengths.add(near.row.wavelength_nm!);
      }
      rows = { distance, list: [...wavelengths].sort((a, b) => a - b).join(",") };
      held.set(used, rows);
    }
    return rows;
  };
}
