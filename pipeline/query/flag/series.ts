import { mean, standardDeviation, weightedMean } from "../../../shared/statistics.ts";
import { tFactor } from "../../../models/decision/tails.ts";
import type { Spread } from "../../../models/pooling/mod.ts";
import { DEFAULT_TRAITS, type DefaultTrait, type Platform } from "../../../shared/schemas/platform.ts";
import { compareIds } from "../../../shared/ids.ts";
import type { Polarisation } from "../../../shared/vocabulary.ts";
import { defaultOf, spreadOf } from "../../traits/platform_defaults.ts";
import type { ReadingRef, TraitName, TraitRow } from "../../traits/trait_row.ts";
import type { SeriesSummary } from "./facts.ts";

/** A die (or a wafer, where readings name no die) by its readings of one series. */
export interface DieMean {
  readonly wafer: string;
  readonly unit: string;
  readonly value: number;
  /** Of the readings and the prior spread between guides of a die. */
  readonly u: number;
  readonly rows: number;
  readonly refs: readonly ReadingRef[];
}

/** Readings that may be compared: one trait, at one wavelength and polarisation where it has them. */
export interface Series {
  readonly key: string;
  readonly trait: TraitName;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  /** `TE>TE+TM`, for traits of a process. */
  readonly process: string | null;
  readonly spread: Spread;
  readonly dies: readonly DieMean[];
}

/** Series of some traits of a lot, in the order of their keys. */
export function seriesOf(
  rows: readonly TraitRow[],
  traits: readonly string[],
  platform: Platform,
): Series[] {
  const byKey = new Map<string, TraitRow[]>();
  for (const row of rows) {
    if (!traits.includes(row.trait) || row.wafer === null) continue;
    const key = seriesKey(row);
    const held = byKey.get(key);
    if (held === undefined) byKey.set(key, [row]);
    else held.push(row);
  }
  return [...byKey.entries()].sort(([a], [b]) => compareIds(a, b)).map(([key, own]) => {
    const { trait, wavelength_nm, polarisation, process } = own[0]!;
    const spread = priorSpread(platform, trait, polarisation);
    return { key, trait, wavelength_nm, polarisation, process, spread, dies: dieMeans(own, spread) };
  });
}

const seriesKey = (r: TraitRow): string =>
  [
    r.trait,
    r.wavelength_nm === null ? "" : Math.round(r.wavelength_nm),
    r.polarisation ?? "",
    r.process ?? "",
  ]
    .join("|");

export const isDefaultTrait = (trait: string): trait is DefaultTrait =>
  (DEFAULT_TRAITS as readonly string[]).includes(trait);

/** What the platform says of a trait's spread; all 0 where it says nothing. */
export function priorSpread(platform: Platform, trait: TraitName, pol: Polarisation | null): Spread {
  if (!isDefaultTrait(trait)) return { lotSd: 0, waferSd: 0, dieSd: 0, guideSd: 0 };
  return spreadOf(platform, trait, defaultOf(platform, trait, pol));
}

function dieMeans(rows: readonly TraitRow[], { guideSd }: Spread): DieMean[] {
  const byDie = new Map<string, TraitRow[]>();
  for (const row of rows) {
    const unit = row.die_id ?? row.wafer!;
    const held = byDie.get(unit);
    if (held === undefined) byDie.set(unit, [row]);
    else held.push(row);
  }
  return [...byDie.entries()].sort(([a], [b]) => compareIds(a, b)).map(([unit, own]) => ({
    wafer: own[0]!.wafer!,
    unit,
    // The spread between guides keeps one very exact reading from speaking for its die alone.
    ...weighted(own.map((r) => ({ value: r.value, u: Math.hypot(r.u, guideSd) }))),
    rows: own.length,
    refs: own.flatMap((r) => r.readings),
  }));
}

/** A weighted mean, or the plain one where no weight is known. */
function weighted(values: readonly { value: number; u: number }[]): { value: number; u: number } {
  return values.some((v) => v.u === 0)
    ? { value: mean(values.map((v) => v.value)), u: 0 }
    : weightedMean(values);
}

export interface WaferMean {
  readonly wafer: string;
  readonly value: number;
  /** Standard error: the larger of what the u and the prior spread between dies say and what the dies' scatter says. */
  readonly se: number;
  readonly dies: readonly DieMean[];
}

/** Means of the wafers of a series. */
export function waferMeans({ dies, spread }: Series): WaferMean[] {
  const byWafer = new Map<string, DieMean[]>();
  for (const die of dies) {
    const held = byWafer.get(die.wafer);
    if (held === undefined) byWafer.set(die.wafer, [die]);
    else held.push(die);
  }
  return [...byWafer.entries()].map(([wafer, own]) => {
    const { value, u } = weighted(own.map((d) => ({ value: d.value, u: Math.hypot(d.u, spread.dieSd) })));
    const scatter = own.length < 2 ? 0 : standardDeviation(own.map((d) => d.value)) / Math.sqrt(own.length);
    return { wafer, value, se: Math.max(u, scatter), dies: own };
  });
}

/** One-sided factor of a standard error for `dies` values: Student's, or the normal one where the u of one value is all there is. */
export const oneSided = (confidence: number, dies: number): number =>
  tFactor(2 * Math.max(confidence, 0.5 + 1e-9) - 1, dies < 2 ? 1e6 : dies - 1);

/** What lots are compared by. */
export function summaryOf({ dies }: Series): SeriesSummary {
  return {
    mean: mean(dies.map((d) => d.value)),
    wafers: [...Map.groupBy(dies, (d) => d.wafer)].map(([wafer, own]) => ({
      wafer,
      values: own.map((d) => d.value),
      readingVariance: mean(own.map((d) => d.u ** 2)),
    })),
  };
}

const UNITS: readonly [suffix: string, unit: string][] = [
  ["_db_cm", " dB/cm"],
  ["_db", " dB"],
  ["_um", " µm"],
  ["_nm", " nm"],
  ["_mm", " mm"],
  ["_per_m", " 1/m"],
  ["_percent_per_w_cm2", " %/(W cm²)"],
  ["_percent_per_w", " %/W"],
  ["_hz", " Hz"],
  ["_c", " °C"],
  ["_mw", " mW"],
];

/** Unit of a trait or figure, from its name; empty for a plain number. */
export const unitOf = (name: string): string => {
  const base = name.replace(/_(signal|idler)$/, "");
  return UNITS.find(([suffix]) => base.endsWith(suffix))?.[1] ?? "";
};

const WORDS: Readonly<Record<string, string>> = {
  loss_db_cm: "loss",
  coupling_db: "coupling loss",
  duty: "duty cycle",
  duty_sd: "spread of the duty cycle",
  merged: "share of missing domains",
  width_error_um: "width less drawn width",
  film_thickness_nm: "film thickness",
  etch_depth_nm: "etch depth",
  titanium_nm: "titanium thickness",
  mfd_x_um: "mode size across",
  mfd_y_um: "mode size in depth",
  mismatch_offset_per_m: "offset of the mismatch",
};

/** A trait as people say it. */
export const traitWords = (trait: string): string => WORDS[trait] ?? trait;

/** `loss at 1550 nm TM`. */
export function seriesWords(
  { trait, wavelength_nm, polarisation, process }: Pick<
    Series,
    "trait" | "wavelength_nm" | "polarisation" | "process"
  >,
): string {
  const at = wavelength_nm === null ? "" : ` at ${Math.round(wavelength_nm)} nm`;
  return `${traitWords(trait)}${at}${polarisation === null ? "" : ` ${polarisation}`}${
    process === null ? "" : ` (${process})`
  }`;
}
