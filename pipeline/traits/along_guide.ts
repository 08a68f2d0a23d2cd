import chiSquaredCdf from "@stdlib/stats-base-dists-chisquare-cdf";
import type { AlongGuide } from "../../models/decision/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import { mean, standardDeviation } from "../../shared/statistics.ts";
import { mm } from "../../shared/units.ts";
import type { GeometryRecord } from "../records.ts";
import { type ReadingRef, refsOf } from "./trait_row.ts";

/** How one parameter of a guide was seen to vary along it. */
export interface AlongReadings {
  readonly parameter: GeometryRecord["quantity"];
  /** Null where the readings scatter no more than their own uncertainty explains. */
  readonly along: AlongGuide | null;
  /** Standard deviation of the readings and their own u, in the parameter's unit. */
  readonly sd: number;
  readonly u: number;
  readonly places: number;
  readonly refs: readonly ReadingRef[];
}
export type AlongByGuide = ReadonlyMap<string, readonly AlongReadings[]>;

/** A scatter that readings of a perfect guide would show less often than this is taken for the guide's own. */
const SIGNIFICANT = 0.05;

/**
 * Readings of geometry along guides (`z_mm` given), less their mean: that is in the guide's geometry already. Readings of one
 * place are averaged; one place alone says nothing about a variation.
 */
export function alongGuides(records: readonly GeometryRecord[], platform: Platform): AlongByGuide {
  const groups = new Map<string, GeometryRecord[]>();
  for (const record of records) {
    if (record.guide_id === null) continue;
    const key = `${record.guide_id}|${record.quantity}`;
    const held = groups.get(key);
    if (held === undefined) groups.set(key, [record]);
    else held.push(record);
  }
  const out = new Map<string, AlongReadings[]>();
  for (const rows of groups.values()) {
    const read = rows.filter((r) => r.z_mm !== null);
    const places = new Map<number, number[]>();
    for (const { z_mm, value } of read) places.set(z_mm!, [...places.get(z_mm!) ?? [], value]);
    if (places.size < 2) continue;
    const { guide_id, quantity } = rows[0]!;
    const found = variation(rows, read, places, platform.defaults.u_value?.[quantity]);
    out.set(guide_id!, [...out.get(guide_id!) ?? [], {
      parameter: quantity,
      ...found,
      refs: refsOf("geometry", read),
    }]);
  }
  return out;
}

function variation(
  rows: readonly GeometryRecord[],
  read: readonly GeometryRecord[],
  places: ReadonlyMap<number, readonly number[]>,
  fallback: number | undefined,
): Omit<AlongReadings, "parameter" | "refs"> {
  // The same mean as the trait's: of all readings of the guide, those without a place among them.
  const centre = mean(rows.map((r) => r.value));
  const us = read.map((r) => r.u_value ?? fallback ?? 0);
  const u = Math.sqrt(mean(us.map((x) => x * x)));
  const own = mean(read.map((r) => r.value));
  const chiSquared = us.some((x) => x === 0)
    ? Infinity
    : read.reduce((sum, r, k) => sum + ((r.value - own) / us[k]!) ** 2, 0);
  const varies = chiSquared === Infinity || 1 - chiSquaredCdf(chiSquared, read.length - 1) < SIGNIFICANT;
  const sorted = [...places].sort(([a], [b]) => a - b);
  return {
    sd: standardDeviation(read.map((r) => r.value)),
    u,
    places: places.size,
    along: varies
      ? {
        parameter: read[0]!.quantity,
        z: sorted.map(([z]) => mm(z)),
        deviation: sorted.map(([, values]) => mean(values) - centre),
      }
      : null,
  };
}
