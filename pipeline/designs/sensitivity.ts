import {
  type GuideInputs,
  matchingPeriod,
  nonCriticalWidths,
  nudgeEffects,
  operatingPoints,
  type PlatformModel,
  predictGuide,
  validTemperatures,
} from "../../models/decision/mod.ts";
import { GEOMETRY_PARAMETERS, type SolvedDesigns, solvedOutputAt } from "../../models/guides/mod.ts";
import { centredOverlap } from "../../models/metrology/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import { mm, toNm, um } from "../../shared/units.ts";
import type { GuideGeometry, Polarisation, Process, ThreeWaves } from "../../shared/vocabulary.ts";
import type { LoadedRequest } from "../requests.ts";

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
  /** Change of the purity, the oven following; null where it is not a matter of the request, or of the parameter. */
  readonly purity: number | null;
}

export interface ModeFacts {
  readonly wave: "pump" | "signal" | "idler";
  readonly wavelength_nm: number;
  readonly polarisation: Polarisation;
  readonly n_eff: number;
  readonly group_index: number;
  /** Solved designs only; null where nothing was solved at this wavelength. */
  readonly modes: number | null;
  readonly mfd_x_um: number | null;
  readonly mfd_y_um: number | null;
  /** Fibre coupling of the solved field, and of elliptic Gaussians of the same mode sizes; null without a fibre. */
  readonly coupling_solved: number | null;
  readonly coupling_gaussian: number | null;
}

export interface DesignSensitivity {
  readonly width_um: number | null;
  readonly period_um: number;
  readonly temperature_c: number;
  /** False when no period of the lot matches within the oven: then the sensitivities are those of the middle of it. */
  readonly matched: boolean;
  readonly purity: number | null;
  readonly rows: readonly SensitivityRow[];
  readonly non_critical_widths_um: readonly number[];
  /** Widths that were looked through; null where the index does not depend on the width. */
  readonly widths_searched_um: readonly [number, number] | null;
  readonly waves: readonly ModeFacts[];
  /** Why there are no numbers, as for a guide that carries no mode. */
  readonly reason: string | null;
}

/** A design to be asked about. Periods in µm at 25 °C; none: the one that matches at the temperature. */
export interface AskedDesign {
  readonly width_um: number | null;
  readonly periods_um: readonly number[];
  readonly poled_length_mm: number;
}

export interface SensitivityQuestion {
  readonly model: PlatformModel;
  readonly platform: Platform;
  readonly designs: SolvedDesigns | null;
  readonly waves: ThreeWaves;
  readonly process: Process;
  /** Oven of the request (°C), or one temperature twice. */
  readonly oven: readonly [number, number];
  readonly request: LoadedRequest | null;
}

/** Sensitivities of one design at its operating point. */
export function sensitivityOf(question: SensitivityQuestion, design: AskedDesign): DesignSensitivity {
  const { model, platform, waves, process, oven, request } = question;
  const geometry = nominalGeometry(platform, design.width_um);
  const none = { width_um: design.width_um, non_critical_widths_um: [], widths_searched_um: null, waves: [] };
  const valid = validTemperatures(model, waves, geometry);
  const [low, high] = "reason" in valid
    ? oven
    : [Math.max(oven[0], valid.range[0]), Math.min(oven[1], valid.range[1])];
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
  const purityAt = purityOf(question, design, period_um);
  const purity = purityAt(geometry);
  const { widths_um, range_um } = nonCriticalWidths(model, point);
  return {
    width_um: design.width_um,
    period_um,
    temperature_c: found.temperatureC,
    matched: found.matched,
    purity,
    rows: nudgeEffects(model, point).map((e): SensitivityRow => {
      const of = (geometry as unknown as Record<string, number | undefined>)[e.parameter];
      const nudged = of === undefined || purity === null
        ? null
        : purityAt({ ...geometry, [e.parameter]: of + e.by });
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
    non_critical_widths_um: widths_um,
    widths_searched_um: range_um,
    waves: waveFacts(question, geometry, found.temperatureC, request),
    reason: null,
  };
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

/** Purity of an ideal, lossless grating in a guide of some geometry; null where the request has none. */
function purityOf({ model, request }: SensitivityQuestion, design: AskedDesign, period_um: number) {
  return (geometry: GuideGeometry): number | null => {
    if (request === null || request.request.process !== "pair-generation" || !request.pulsed) return null;
    const exact = (value: number, key: string) => ({ value, u: 0, basis: "platform" as const, key });
    const arm = {
      loss: exact(0, "loss"),
      mode: { reason: "not asked" },
      facet: { state: "bare" as const, basis: "platform" as const },
    };
    const inputs: GuideInputs = {
      id: "design",
      geometry,
      geometryErrors: [],
      length: mm(design.poled_length_mm),
      period: um(period_um),
      poledFrom: 0,
      poledLength: mm(design.poled_length_mm),
      pumpLoss: exact(0, "loss"),
      signal: arm,
      idler: arm,
      poling: {
        from: "duty",
        duty: exact(0.5, "duty"),
        dutySd: exact(0, "duty_sd"),
        merged: exact(0, "merged"),
      },
      offset: null,
    };
    const { figures } = predictGuide(model, request, inputs, { recorded: request.spectrum });
    return figures.find((f) => f.figure === "purity")?.mean ?? null;
  };
}

function waveFacts(
  { model, designs, waves }: SensitivityQuestion,
  geometry: GuideGeometry,
  temperatureC: number,
  request: LoadedRequest | null,
): ModeFacts[] {
  const arms = [
    ["pump", waves.lambdaP, waves.polP, undefined],
    ["signal", waves.lambdaS, waves.polS, request?.request.signal.fibre_mfd_um],
    ["idler", waves.lambdaI, waves.polI, request?.request.idler?.fibre_mfd_um],
  ] as const;
  return arms.map(([wave, lambda, pol, fibre_um]): ModeFacts => {
    const solved = designs === null ? null : solvedOutputAt(designs.outputs, geometry, pol, lambda);
    const output = solved === null || solved.result.cutOff ? null : solved.result;
    const fibre = fibre_um === undefined ? undefined : fibre_um * 1e-6;
    const coupled = output?.fibres.find((f) => fibre !== undefined && Math.abs(f.mfd / fibre - 1) < 1e-9);
    return {
      wave,
      wavelength_nm: toNm(lambda),
      polarisation: pol,
      n_eff: model.index.nEff(pol, lambda, temperatureC, geometry),
      group_index: model.index.groupIndex(pol, lambda, temperatureC, geometry),
      modes: output === null ? null : output.modes.even + output.modes.odd,
      mfd_x_um: output === null ? null : output.shape.mfdX * 1e6,
      mfd_y_um: output === null ? null : output.shape.mfdY * 1e6,
      coupling_solved: coupled?.value ?? null,
      coupling_gaussian: output === null || fibre === undefined
        ? null
        : centredOverlap([output.shape.mfdX, output.shape.mfdY], [fibre, fibre]),
    };
  });
}
