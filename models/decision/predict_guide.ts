// Pure: no I/O, no clock, no hidden randomness.
import { absent, given, PAIR_FIGURES, type PairFigure, type PairScratch } from "../pairs/mod.ts";
import type { GeometryParameter } from "../guides/mod.ts";
import type { Grating } from "../poling/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { type Figure, figureAbsence, FIGURES } from "../../shared/schemas/figures.ts";
import { nm, toDbPerCm, toNm } from "../../shared/units.ts";
import type { Basis, Polarisation } from "../../shared/vocabulary.ts";
import { conformity, decide, type Decision, meets, summarise } from "./conformity.ts";
import { type ConversionFigure, predictConversion } from "./conversion_prediction.ts";
import { DEFAULT_SAMPLE, type SampleSize } from "./draws.ts";
import { type DrawnTraits, drawTraits, type MismatchSensitivity } from "./drawn_traits.ts";
import { FigureDraws } from "./figure_draws.ts";
import { basisOf } from "./figure_basis.ts";
import { drawGrating, gratingForPeak, inspectedGrating } from "./grating_draws.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import { drawOperatingPoints, type OperatingDraws } from "./operating_draws.ts";
import { mismatchProfile } from "./mismatch_profile.ts";
import { type OperatingPoint, type OperatingPoints, operatingPoints } from "./operating_point.ts";
import { type PairNotes, type PairQuestion, predictPairs, type RecordedSpectrum } from "./pair_prediction.ts";
import { type PlatformModel, validTemperatures } from "./platform_model.ts";
import { type Site, siteAt } from "./site.ts";

/** One figure of one guide. Without a value: the reason. Units are in the figure's name. */
export interface PredictedFigure {
  readonly figure: Figure;
  readonly mean: number | null;
  readonly u: number | null;
  readonly lo: number | null;
  readonly hi: number | null;
  /** Probability that the requirement on this figure is met; null without one. */
  readonly probability: number | null;
  readonly basis: Basis;
  readonly reason: string | null;
}

export interface GuidePrediction {
  /** Every figure of the request's process, in the order of output. */
  readonly figures: readonly PredictedFigure[];
  /** Share of draws with an operating point that meet every requirement. */
  readonly probability: number;
  readonly decision: Decision;
  /** The requirement least often met, or `operating_temperature_c` when even the operating point is met less often. */
  readonly limitedBy: Figure | null;
  /** Share of draws that have an operating point. */
  readonly matched: number;
  /** Further temperatures that match, °C. */
  readonly otherTemperatures: readonly number[];
  readonly pairs: PairNotes | null;
  readonly remarks: readonly string[];
}

export interface PredictOptions {
  readonly recorded: RecordedSpectrum | null;
  readonly scratch?: PairScratch;
  /** Draws to begin with; {@link DEFAULT_SAMPLE} if left out. */
  readonly size?: SampleSize;
}

type Draws = FigureDraws<Figure>;

/**
 * All figures of one guide for one request, by seeded sampling (JCGM 101:2008): draws of every trait for budgets,
 * temperatures and efficiencies, the first of them with spectra of their own. The same inputs give the same answer to the
 * bit.
 */
export function predictGuide(
  model: PlatformModel,
  checked: CheckedRequest,
  guide: GuideInputs,
  options: PredictOptions,
): GuidePrediction {
  const sensitivity = mismatchSensitivity(model, checked, guide);
  const drawn = drawTraits(guide, sensitivity, options.size ?? DEFAULT_SAMPLE);
  const profile = mismatchProfile(guide.along ?? [], sensitivity);
  const out: Draws = new FigureDraws(drawn.size.draws);
  const loss = (name: Figure, alpha: Float64Array) =>
    alpha.forEach((a, k) => out.set(name, k, given(toDbPerCm(a))));
  loss("loss_db_cm_signal", drawn.lossS);
  loss("loss_db_cm_idler", drawn.lossI);
  const walls = inspectedGrating(guide);
  // Along a guide that varies, the design period is no longer where it converts best: its peak is looked for.
  const asked = { ...question(checked, guide, gratingForPeak(guide, walls, profile)), profile };
  const points = guide.poledLength > 0 ? operatingPoints(model, asked) : { reason: "the guide is not poled" };
  if ("reason" in points) return nowhere(checked, guide, out, points.reason);
  const nominalOffset = guide.offset?.value ?? 0;
  const nominal = points.at(nominalOffset);
  const draws = drawOperatingPoints(model, asked, points, nominal, nominalOffset, drawn.offset);
  const { exists, point, offset } = drawPoints(
    points,
    draws,
    drawn.offset,
    nominal,
    nominalOffset,
    out,
    checked,
  );
  const site = siteAt(model, guide, checked.processKey, point.waves, point.temperatureC, offset, profile);
  if ("reason" in site) return nowhere(checked, guide, out, site.reason);
  const pairs = predictSite(site, checked, guide, drawn, walls, exists, out, options);
  const remarks = [...pairs?.remarks ?? [], ...indexRemarks(model, site)];
  return conclude(checked, guide, out, exists, point, pairs, remarks);
}

/**
 * ∂Δβ/∂parameter in the middle of the oven's range: over it the slope changes by a few per cent, which is little beside
 * the uncertainty that it carries. 0 where the index does not depend on the parameter, or is not known.
 */
function mismatchSensitivity(
  model: PlatformModel,
  { waves, request }: CheckedRequest,
  guide: GuideInputs,
): MismatchSensitivity {
  const valid = validTemperatures(model, waves, guide.geometry);
  if ("reason" in valid) return () => 0;
  const [low, high] = [0, 1].map((k) =>
    Math.min(valid.range[1], Math.max(valid.range[0], request.oven_c[k]!))
  );
  const at = (low! + high!) / 2;
  const one = (pol: Polarisation, lambda: number, parameter: GeometryParameter) =>
    2 * Math.PI / lambda * model.index.sensitivity(pol, lambda, at, guide.geometry, parameter);
  return (parameter) =>
    one(waves.polP, waves.lambdaP, parameter) - one(waves.polS, waves.lambdaS, parameter) -
    one(waves.polI, waves.lambdaI, parameter);
}

function question(checked: CheckedRequest, guide: GuideInputs, walls: Grating | null) {
  const { request, waves } = checked;
  const tunable = request.pump?.tunable_nm;
  return {
    waves,
    oven: request.oven_c,
    tunable: tunable === undefined ? null : [nm(tunable[0]), nm(tunable[1])] as const,
    geometry: guide.geometry,
    period: guide.period,
    poledLength: guide.poledLength,
    walls,
  };
}

const unmatchedReason = ({ request }: CheckedRequest): string =>
  `no phase matching within the oven's ${request.oven_c[0]}–${request.oven_c[1]} °C` +
  (request.pump?.tunable_nm === undefined
    ? ""
    : `, nor with the pump tuned over ${request.pump.tunable_nm.join("–")} nm`);

/**
 * Every draw re-tunes the oven. Without any root the nearest temperature is reported, and the draw does not exist.
 * @returns which draws exist, and the point that stands for all of them: the nominal one, or where that does not match the
 * one of the matching draw whose offset is nearest to it
 */
function drawPoints(
  points: OperatingPoints,
  draws: OperatingDraws,
  offsets: Float64Array,
  nominal: OperatingPoint,
  nominalOffset: number,
  out: Draws,
  checked: CheckedRequest,
): { exists: Uint8Array; point: OperatingPoint; offset: number } {
  const exists = draws.matched;
  const unmatched = absent(unmatchedReason(checked));
  let nearest = -1;
  for (let k = 0; k < offsets.length; k++) {
    out.set("operating_temperature_c", k, given(draws.temperatureC[k]!));
    out.set("operating_pump_nm", k, exists[k] === 1 ? given(toNm(draws.lambdaP[k]!)) : unmatched);
    const off = (n: number) => Math.abs(offsets[n]! - nominalOffset);
    if (exists[k] === 1 && (nearest < 0 || off(k) < off(nearest))) nearest = k;
  }
  if (nominal.matched || nearest < 0) return { exists, point: nominal, offset: nominalOffset };
  return { exists, point: points.at(offsets[nearest]!), offset: offsets[nearest]! };
}

function predictSite(
  site: Site,
  checked: CheckedRequest,
  guide: GuideInputs,
  drawn: DrawnTraits,
  walls: Grating | null,
  exists: Uint8Array,
  out: Draws,
  options: PredictOptions,
): PairNotes | null {
  const unmatched = unmatchedReason(checked);
  const anywhere = exists.some((x) => x === 1);
  const gratings = walls !== null
    ? [walls]
    : Array.from({ length: anywhere ? drawn.size.spectral : 1 }, (_, k) =>
      drawGrating(guide, { duty: drawn.duty[k]!, dutySd: drawn.dutySd[k]!, merged: drawn.merged[k]! }, k));
  predictConversion(
    { site, checked, drawn, gratings, exists, unmatched },
    out as FigureDraws<ConversionFigure>,
  );
  if (checked.request.process !== "pair-generation") return null;
  const limit = Math.min(
    ...checked.requirements.filter((r) => r.figure === "g2_heralded").map((r) => r.atMost),
  );
  const asked: PairQuestion = {
    site,
    checked,
    recorded: options.recorded,
    drawn,
    grating: (k) => gratings[k % gratings.length]!,
    walls,
    exists,
    unmatched,
    g2Limit: limit === Infinity ? undefined : limit,
  };
  try {
    return predictPairs(asked, out as FigureDraws<PairFigure>, options.scratch);
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    // A window or a pulse that reaches beyond the index: of this guide's platform nothing can be said, of others it can.
    for (const name of PAIR_FIGURES) out.fill(name, absent(error.message));
    return null;
  }
}

function indexRemarks(model: PlatformModel, { guide: { geometry }, waves, temperatureC }: Site): string[] {
  const found = [
    model.index.remark(waves.polP, waves.lambdaP, temperatureC, geometry),
    model.index.remark(waves.polS, waves.lambdaS, temperatureC, geometry),
    model.index.remark(waves.polI, waves.lambdaI, temperatureC, geometry),
  ];
  return [...new Set(found.filter((r) => r !== null).flatMap((r) => r.split("\n")))];
}

/** A guide for which the process is not defined: nothing but its losses is known. */
function nowhere(checked: CheckedRequest, guide: GuideInputs, out: Draws, reason: string): GuidePrediction {
  for (const figure of FIGURES) {
    if (out.names().includes(figure)) continue;
    if (figureAbsence(figure, checked.request.process, checked.pulsed) === null) {
      out.fill(figure, absent(reason));
    }
  }
  return conclude(checked, guide, out, new Uint8Array(out.count), null, null, []);
}

function conclude(
  checked: CheckedRequest,
  guide: GuideInputs,
  out: Draws,
  exists: Uint8Array,
  nominal: OperatingPoint | null,
  pairs: PairNotes | null,
  remarks: readonly string[],
): GuidePrediction {
  const { request, requirements } = checked;
  const met = requirements.map((r) => meets(out.of(r.figure), r));
  const { joint, each, limiting } = conformity(met, exists);
  const matched = exists.reduce((sum, x) => sum + x, 0) / out.count;
  const weakest = limiting === null ? 1 : each[limiting]!;
  const limitedBy = matched < weakest
    ? "operating_temperature_c"
    : limiting === null
    ? null
    : requirements[limiting]!.figure;
  const figures = FIGURES
    .filter((figure) => figureAbsence(figure, request.process, checked.pulsed) === null)
    .map((figure): PredictedFigure => {
      const summary = summarise(out.of(figure));
      // Two limits on one figure are two requirements: the probability shown is of both.
      const own = met.filter((_, i) => requirements[i]!.figure === figure);
      const reason = out.reason(figure);
      const absentIn = summary === null || summary.valid === out.count
        ? null
        : `${reason} (in ${out.count - summary.valid} of ${out.count} draws)`;
      return {
        figure,
        mean: summary?.mean ?? null,
        u: summary?.u ?? null,
        lo: summary?.lo ?? null,
        hi: summary?.hi ?? null,
        probability: own.length === 0 ? null : conformity(own, new Uint8Array(out.count).fill(1)).joint,
        basis: basisOf(figure, guide),
        reason: summary === null ? reason ?? "not computed" : absentIn,
      };
    });
  const { accept_at: acceptAt, reject_below: rejectBelow } = request.decide;
  return {
    figures,
    probability: joint,
    decision: decide(joint, { acceptAt, rejectBelow }),
    limitedBy,
    matched,
    otherTemperatures: nominal?.others ?? [],
    pairs,
    remarks,
  };
}
