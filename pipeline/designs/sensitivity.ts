import {
  matchingPeriod,
  nonCriticalWidths,
  type NudgeEffect,
  nudgeEffects,
  operatingPoints,
  validTemperatures,
} from "../../models/decision/mod.ts";
import { diffusionRemarks, GEOMETRY_PARAMETERS, type WidthScan } from "../../models/guides/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import { mm, toNm, um } from "../../shared/units.ts";
import type { GuideGeometry, Process } from "../../shared/vocabulary.ts";
import type { ChangedModel } from "./changed_models.ts";
import { idealPurity } from "./ideal_purity.ts";
import { type FactsQuestion, type ModeFacts, waveFacts } from "./mode_facts.ts";

/** What one error does, in the units of output. */
export interface SensitivityRow {
  readonly parameter: string;
  readonly by: number;
  readonly mismatch_per_m: number;
  /** Move of the centre at fixed temperature; null where no wavelength near it makes up for the mismatch. */
  readonly centre_nm: number | null;
  /** By how much the oven has to follow at fixed wavelength. */
  readonly temperature_c: number | null;
  /** Change of the peak efficiency, percent of itself. */
  readonly efficiency_percent: number | null;
  /**
   * Change of the purity, the oven following (for a temperature: the period); null where the request has none, or the
   * oven can't follow.
   */
  readonly purity: number | null;
}

/** A width at which Δβ does not follow the width to first order, and what 0.1 µm off it leaves to second order. */
export interface NonCritical {
  readonly width_um: number;
  /** Either sign of the error. */
  readonly by: number;
  readonly mismatch_per_m: number;
  readonly temperature_c: number | null;
}

export interface DesignSensitivity {
  readonly width_um: number | null;
  readonly period_um: number;
  readonly temperature_c: number;
  /** False when no period of the lot matches within the oven: then the sensitivities are those of the middle of it. */
  readonly matched: boolean;
  readonly purity: number | null;
  readonly rows: readonly SensitivityRow[];
  readonly non_critical_widths: readonly NonCritical[];
  /** Widths that were looked through; null where the index does not depend on the width. */
  readonly widths_searched_um: readonly [number, number] | null;
  /** Why narrower widths were not looked through, or null. */
  readonly widths_cut_off: string | null;
  readonly waves: readonly ModeFacts[];
  /** What lies beyond a published range, is an estimate, or carries more modes than the one computed. */
  readonly remarks: readonly string[];
  /** Why there are no numbers, as for a guide that carries no mode. */
  readonly reason: string | null;
}

/** A design to be asked about. Periods in µm at 25 °C; none: the one that matches at the temperature. */
export interface AskedDesign {
  readonly width_um: number | null;
  readonly periods_um: readonly number[];
  readonly poled_length_mm: number;
}

export interface SensitivityQuestion extends FactsQuestion {
  readonly platform: Platform;
  /** The platform with its process off, per drawn width (µm). */
  readonly changed: ReadonlyMap<number, readonly ChangedModel[]>;
  /** How Δβ follows the width, per drawn width (µm). */
  readonly widths: ReadonlyMap<number, WidthScan>;
  readonly process: Process;
  /** Oven of the request (°C), or one temperature twice. */
  readonly oven: readonly [number, number];
}

/** Sensitivities of one design at its operating point. */
export function sensitivityOf(question: SensitivityQuestion, design: AskedDesign): DesignSensitivity {
  const { model, platform, waves, process, oven } = question;
  const geometry = nominalGeometry(platform, design.width_um);
  const none = {
    width_um: design.width_um,
    non_critical_widths: [],
    widths_searched_um: null,
    widths_cut_off: null,
    waves: [],
    remarks: [],
  };
  const valid = validTemperatures(model, waves, geometry);
  const [low, high] = validRange(valid, oven);
  if ("reason" in valid || low > high) {
    const reason = "reason" in valid ? valid.reason : `no index within ${oven[0]} to ${oven[1]} °C`;
    return {
      ...none,
      period_um: design.periods_um[0] ?? NaN,
      temperature_c: oven[0],
      matched: false,
      purity: null,
      rows: [],
      reason,
    };
  }
  const found = operatingPoint(question, design, geometry, [low, high]);
  const point = { waves, process, geometry, temperatureC: found.temperatureC };
  const period_um = found.period_um ?? matchingPeriod(model, point) * 1e6;
  const purityAt = idealPurity(question.request, design.poled_length_mm);
  const purity = purityAt(model, geometry, period_um);
  const changed = changedOf(question, design);
  const effects = nudgeEffects(model, point, changed);
  const purityOff = ({ parameter, by }: NudgeEffect): number | null => {
    if (purity === null) return null;
    if (parameter === "temperature_c") {
      const there = { ...point, temperatureC: found.temperatureC + by };
      if (there.temperatureC > high) return null;
      return purityAt(model, geometry, matchingPeriod(model, there) * 1e6);
    }
    const drawn = (geometry as unknown as Record<string, number | undefined>)[parameter];
    if (drawn !== undefined) return purityAt(model, { ...geometry, [parameter]: drawn + by }, period_um);
    const other = changed.find((c) => c.parameter === parameter && c.by === by);
    return other === undefined ? null : purityAt(other.model, geometry, period_um);
  };
  const scan = design.width_um === null ? undefined : question.widths.get(design.width_um);
  const { widths, range_um, cutOff } = nonCriticalWidths(model, point, scan);
  const perKelvin = effects.find((e) => e.parameter === "temperature_c")?.deltaBeta ?? 0;
  return {
    width_um: design.width_um,
    period_um,
    temperature_c: found.temperatureC,
    matched: found.matched,
    purity,
    rows: effects.map((e): SensitivityRow => {
      const nudged = purityOff(e);
      return {
        parameter: e.parameter,
        by: e.by,
        mismatch_per_m: e.deltaBeta,
        centre_nm: e.centre === null ? null : toNm(e.centre),
        temperature_c: e.temperatureC,
        efficiency_percent: e.efficiency === null ? null : 100 * e.efficiency,
        purity: nudged === null ? null : nudged - purity!,
      };
    }),
    non_critical_widths: widths.map(({ width_um, curvature }) => {
      const left = curvature / 2 * OFF_UM ** 2;
      return {
        width_um,
        by: OFF_UM,
        mismatch_per_m: left,
        temperature_c: perKelvin === 0 ? null : -left / perKelvin,
      };
    }),
    widths_searched_um: range_um,
    widths_cut_off: cutOff,
    waves: waveFacts(question, geometry, found.temperatureC),
    remarks: remarksOf(question, geometry, found.temperatureC),
    reason: null,
  };
}

/** Temperatures of the oven at which every index is known; the oven's where none is. */
const validRange = (
  valid: ReturnType<typeof validTemperatures>,
  oven: readonly [number, number],
): readonly [number, number] =>
  "reason" in valid ? oven : [Math.max(oven[0], valid.range[0]), Math.min(oven[1], valid.range[1])];

/** How far off a non-critical width what is left is told. */
const OFF_UM = 0.1;

const changedOf = ({ changed }: SensitivityQuestion, { width_um }: AskedDesign): readonly ChangedModel[] =>
  width_um === null ? [] : changed.get(width_um) ?? [];

/** Each remark on the three waves once, and those on the process. */
function remarksOf(
  { model, platform: { index }, waves }: SensitivityQuestion,
  geometry: GuideGeometry,
  temperatureC: number,
): string[] {
  const all =
    ([[waves.polP, waves.lambdaP], [waves.polS, waves.lambdaS], [waves.polI, waves.lambdaI]] as const)
      .flatMap(([pol, lambda]) => model.index.remark(pol, lambda, temperatureC, geometry)?.split("\n") ?? []);
  if (index.from === "solver" && index.profile === "titanium-diffused" && index.diffusion !== undefined) {
    all.push(...diffusionRemarks(index.diffusion.temperature_c));
  }
  return [...new Set(all)];
}

/** Everything that the index may be asked with, as drawn and as the platform's file has it. */
export function nominalGeometry({ index }: Platform, width_um: number | null): GuideGeometry {
  const nominal: Record<string, number | undefined> = index.from === "table"
    ? index.nominal ?? {}
    : index.from === "solver" && index.profile === "titanium-diffused"
    ? index.nominal
    : {};
  const out: Record<string, number> = { width_um: width_um ?? 5 };
  for (const key of GEOMETRY_PARAMETERS) if (nominal[key] !== undefined) out[key] = nominal[key];
  return out as unknown as GuideGeometry;
}

function operatingPoint(
  { model, waves }: SensitivityQuestion,
  design: AskedDesign,
  geometry: GuideGeometry,
  oven: readonly [number, number],
): { temperatureC: number; matched: boolean; period_um: number | null } {
  const middle = (oven[0] + oven[1]) / 2;
  if (design.periods_um.length === 0) return { temperatureC: middle, matched: true, period_um: null };
  for (const period_um of design.periods_um) {
    const points = operatingPoints(model, {
      waves,
      oven,
      tunable: null,
      geometry,
      period: um(period_um),
      poledLength: mm(design.poled_length_mm),
      walls: null,
    });
    if ("reason" in points) continue;
    const { matched, temperatureC } = points.at(0);
    if (matched) return { temperatureC, matched, period_um };
  }
  return { temperatureC: middle, matched: false, period_um: design.periods_um[0]! };
}
