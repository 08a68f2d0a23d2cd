import { fitTuningScan, isRefused } from "../../models/metrology/mod.ts";
import { mismatchProfile, parameterSlope } from "../../models/decision/mod.ts";
import { type GeometryParameter, mismatch } from "../../models/guides/mod.ts";
import {
  bandForPeak,
  type Grating,
  gratingSpectrum,
  mainPeaks,
  uniformGrating,
} from "../../models/poling/mod.ts";
import { mm, nm, um } from "../../shared/units.ts";
import type { GuideGeometry, Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { GuideRecord, TuningRecord } from "../records.ts";
import type { AlongByGuide } from "../traits/along_guide.ts";
import { resolveGeometry } from "../traits/geometry.ts";
import type { TraitPools } from "../traits/pools.ts";
import { type ReadingRef, refsOf, type TraitRow } from "../traits/trait_row.ts";
import { type WindowsByUnit, windowsByUnit } from "../traits/guide_traits.ts";
import { grouped, type LotReadings, placeOf, type Reduced } from "./lot_readings.ts";
import { shapeTraits } from "./scan_shape.ts";

/** Peak of |φ|² over |Δβ|·scale (1/m) of a guide whose walls are all known, and the lines that they stand on. */
export interface WallPeak {
  readonly deltaBeta: number;
  readonly refs: readonly ReadingRef[];
  /** With it the guide's own share in a scan's shape is known, and where its cross-section varies the peak of any process. */
  readonly grating?: Grating | null;
}
/** By guide id. */
export type WallPeaks = ReadonlyMap<string, WallPeak>;

/** Tuning scans: the offset of Δβ that moves the calculated centre onto the measured one, and what the width says. */
export function reduceTuning(
  readings: LotReadings,
  peaks: WallPeaks,
  pools: TraitPools,
  along: AlongByGuide = new Map(),
): Reduced {
  const out: Reduced = { traits: [], remarks: [] };
  const scans = grouped(readings.tuning, (r) => `${r.unit}|${r.scan}|${r.polarisations}|${r.file_name}`);
  const windows = windowsByUnit(readings.poling);
  for (const scan of scans) reduceScan(readings, scan, peaks, pools, along, windows, out);
  return out;
}

function reduceScan(
  readings: LotReadings,
  scan: TuningRecord[],
  peaks: WallPeaks,
  pools: TraitPools,
  along: AlongByGuide,
  windows: WindowsByUnit,
  out: Reduced,
): void {
  const first = scan[0]!;
  const name = `${first.unit}, scan ${first.scan}`;
  const refuse = (why: string): void => {
    out.remarks.push({ code: "tuning_refused", unit: first.unit, statement: `${name}: ${why}` });
  };
  const guide = first.guide_id === null ? undefined : readings.design.guideById.get(first.guide_id);
  if (guide === undefined) {
    return refuse("a tuning scan calibrates the guide that it names, and this one names none");
  }
  const distinct = (f: (r: TuningRecord) => number) => new Set(scan.map(f)).size;
  const overTemperature = distinct((r) => r.temperature_c) > distinct((r) => r.wavelength_nm);
  const x = (r: TuningRecord) => overTemperature ? r.temperature_c : r.wavelength_nm;
  if (guide.poled_length_mm <= 0) return refuse("the guide is not poled");
  const { geometry, errors } = resolveGeometry(pools, guide);
  const { process, mismatchAt, wavesAt } = scanProcess(readings, first, geometry);
  // Fitted against the calculated Δβ·scale of each point, on which alone φ depends, and not against x: over a scan in
  // temperature Δβ bends and the period expands, and a sinc² in x would take both for a shift of the centre.
  const { expansion } = readings.model;
  let points: { x: number; power: number }[];
  try {
    points = scan.map((r) => ({ x: mismatchAt(r) * expansion(r.temperature_c), power: r.power_rel }));
  } catch (error) {
    if (error instanceof RangeError) return refuse(error.message);
    throw error;
  }
  const fit = fitTuningScan(points);
  if (isRefused(fit)) return refuse(fit.refused);
  const off = (k: number) => Math.abs(points[k]!.x - fit.centre.value);
  const nearest = scan[points.reduce((best, _, k) => off(k) < off(best) ? k : best, 0)]!;
  // Scans of several processes may be of one guide, and Δβ of either sign: the sign is the scan's own.
  const peak = peaks.get(guide.guide_id)?.deltaBeta ?? 2 * Math.PI / um(guide.period_um);
  const sign = Math.sign(fit.centre.value);
  const varying = along.get(guide.guide_id) ?? [];
  const slopeOf = (parameter: GeometryParameter) =>
    parameterSlope(
      readings.model,
      { waves: wavesAt(nearest), geometry, temperatureC: nearest.temperature_c },
      parameter,
    );
  const profile = mismatchProfile(varying.flatMap((v) => v.along ?? []), slopeOf);
  const target = profile === undefined
    ? sign * peak
    : peakAlong(guide, peaks.get(guide.guide_id)?.grating ?? null, profile, sign);
  const scale = expansion(nearest.temperature_c);
  const common = {
    ...placeOf(first, readings.design),
    wavelength_nm: nearest.wavelength_nm,
    polarisation: null,
    process,
    u_from: "fit" as const,
    method: `tuning scan ${first.scan} over ${overTemperature ? "temperature" : "wavelength"}`,
    // The offset is what the scan leaves beside the guide's geometry and, where they are known, its walls.
    readings: [
      ...refsOf("tuning", scan),
      ...peaks.get(guide.guide_id)?.refs ?? [],
      ...(profile === undefined ? [] : varying.flatMap((v) => v.along === null ? [] : v.refs)),
      ...errors.flatMap((e) => e.resolved.used.flatMap((k) => pools.rows[k]!.readings)),
    ],
    detail: `peak near ${x(nearest)} ${overTemperature ? "°C" : "nm"}, width ${
      fit.fwhm.value.toPrecision(4)
    } 1/m in Δβ`,
  } satisfies Partial<TraitRow>;
  out.traits.push({
    ...common,
    trait: "mismatch_offset_per_m",
    value: (target - fit.centre.value) / scale,
    u: fit.centre.u / scale,
    // As far as the scan's guide is not as wide or thick as it is taken to be, its offset is its own.
    u_pooled: Math.hypot(fit.centre.u / scale, ...errors.map((e) => slopeOf(e.parameter) * e.resolved.u)),
  });
  const offsets = Float64Array.from(fit.used, (k) => points[k]!.x - fit.centre.value);
  const walls = peaks.get(guide.guide_id)?.grating ?? null;
  out.traits.push(...shapeTraits(fit, offsets, { guide, walls, profile, peak: target }, windows, common));
}

/** Δβ·scale (1/m, signed) at the peak of |φ|² of a guide whose mismatch varies along it. */
function peakAlong(
  guide: GuideRecord,
  walls: Grating | null,
  profile: NonNullable<ReturnType<typeof mismatchProfile>>,
  sign: number,
): number {
  const period = um(guide.period_um);
  const poledLength = mm(guide.poled_length_mm);
  const grating = walls ?? uniformGrating({ start: mm(guide.poled_from_mm), length: poledLength, period });
  const vector = sign * 2 * Math.PI / period;
  const band = bandForPeak(vector, vector, period, grating.end - grating.start);
  return mainPeaks(gratingSpectrum(grating, band, { poledLength, profile }))[0]?.deltaBeta ?? vector;
}

/** The process that a scan is about, and its Δβ as calculated at a point of the scan. */
function scanProcess({ model }: LotReadings, { polarisations }: TuningRecord, geometry: GuideGeometry) {
  const [a, b, polP] = polarisations.split(/[+>]/) as [Polarisation, Polarisation, Polarisation];
  // Signal and idler in alphabetic order: the inputs of a second harmonic have none.
  const [polS, polI] = a <= b ? [a, b] : [b, a];
  const wavesAt = ({ wavelength_nm }: TuningRecord): ThreeWaves => {
    const lambda = nm(wavelength_nm);
    return { lambdaP: lambda / 2, lambdaS: lambda, lambdaI: lambda, polP, polS, polI };
  };
  return {
    process: `${polP}>${polS}+${polI}`,
    wavesAt,
    mismatchAt: (r: TuningRecord): number => mismatch(model.index, wavesAt(r), r.temperature_c, geometry),
  };
}
