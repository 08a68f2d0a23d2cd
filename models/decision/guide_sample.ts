// Pure: no I/O, no clock, no hidden randomness.
import { absent, given, PAIR_FIGURES, type PairFigure, type PairScratch } from "../pairs/mod.ts";
import type { Grating } from "../poling/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { type Figure, figureAbsence, FIGURES } from "../../shared/schemas/figures.ts";
import { nm, toDbPerCm, toNm } from "../../shared/units.ts";
import type { ThreeWaves } from "../../shared/vocabulary.ts";
import { type ConversionFigure, predictConversion } from "./conversion_prediction.ts";
import type { SampleSize } from "./draws.ts";
import { type DrawnTraits, drawTraits } from "./drawn_traits.ts";
import { FigureDraws } from "./figure_draws.ts";
import { mismatchBend, mismatchSensitivity } from "./geometry_errors.ts";
import { drawGrating, gratingForPeak, inspectedGrating } from "./grating_draws.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import { drawOperatingPoints, type OperatingDraws } from "./operating_draws.ts";
import { spreadFactor, withSpread } from "./mismatch_draws.ts";
import { mismatchProfile } from "./mismatch_profile.ts";
import { type OperatingPoint, type OperatingPoints, operatingPoints } from "./operating_point.ts";
import { otherScanRemarks, tellingScan } from "./other_scan.ts";
import { type PairNotes, type PairQuestion, predictPairs, type RecordedSpectrum } from "./pair_prediction.ts";
import type { PlatformModel } from "./platform_model.ts";
import { type Site, siteAt } from "./site.ts";

/** What a sample of a guide needs beside the guide. */
export interface SampleOptions {
  readonly recorded: RecordedSpectrum | null;
  readonly scratch?: PairScratch;
}

/** Draws of everything that a guide does for a request. */
export interface GuideSample {
  readonly drawn: DrawnTraits;
  readonly figures: FigureDraws<Figure>;
  /** Per draw, 1 where the guide has an operating point. */
  readonly exists: Uint8Array;
  /** The point that stands for all draws; null when the process is not defined. */
  readonly point: OperatingPoint | null;
  readonly pairs: PairNotes | null;
  readonly remarks: readonly string[];
}

type Draws = FigureDraws<Figure>;

/**
 * Seeded sampling of one guide (JCGM 101:2008): draws of every trait for budgets, temperatures and efficiencies, the first of
 * them with spectra of their own; later ones take these in turn. The same inputs give the same draws to the bit.
 */
export function sampleGuide(
  model: PlatformModel,
  checked: CheckedRequest,
  guide: GuideInputs,
  options: SampleOptions,
  size: SampleSize,
): GuideSample {
  const sensitivityOf = (waves: ThreeWaves) => mismatchSensitivity(model, waves, checked, guide);
  const sensitivity = sensitivityOf(checked.waves);
  const bendOf = (waves: ThreeWaves) => mismatchBend(model, waves, checked, guide);
  const told = tellingScan(guide, (waves) => ({ slope: sensitivityOf(waves), bend: bendOf(waves) }));
  const drawn = drawTraits(guide, sensitivity, size, bendOf(checked.waves), told);
  const profile = mismatchProfile(guide.along ?? [], sensitivity);
  const out: Draws = new FigureDraws(size.draws);
  const loss = (name: Figure, alpha: Float64Array) =>
    alpha.forEach((a, k) => out.set(name, k, given(toDbPerCm(a))));
  loss("loss_db_cm_signal", drawn.lossS);
  loss("loss_db_cm_idler", drawn.lossI);
  const walls = inspectedGrating(guide);
  // Along a guide that varies, the design period is no longer where it converts best: its peak is looked for.
  const asked = { ...question(checked, guide, gratingForPeak(guide, walls, profile)), profile };
  const points = guide.poledLength > 0 ? operatingPoints(model, asked) : { reason: "the guide is not poled" };
  if ("reason" in points) return nowhere(checked, drawn, out, points.reason);
  const { nominalOffset } = drawn;
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
  if ("reason" in site) return nowhere(checked, drawn, out, site.reason);
  const spread = guide.mismatchSpread ?? null;
  const factor = spread === null ? null : spreadFactor(checked.waves, spread, guide, sensitivityOf);
  const pairs = predictSite(site, checked, drawn, walls, factor?.factor ?? null, exists, out, options);
  const remarks = [
    ...pairs?.remarks ?? [],
    ...indexRemarks(model, site),
    ...spread === null ? [] : spreadRemarks(factor),
    ...otherScanRemarks(guide, told, sensitivity),
  ];
  return { drawn, figures: out, exists, point, pairs, remarks };
}

/** A guide for which the process is not defined: nothing but its losses is known. */
function nowhere(
  { request, pulsed }: CheckedRequest,
  drawn: DrawnTraits,
  out: Draws,
  reason: string,
): GuideSample {
  for (const figure of FIGURES) {
    if (out.names().includes(figure)) continue;
    if (figureAbsence(figure, request.process, pulsed) === null) out.fill(figure, absent(reason));
  }
  return { drawn, figures: out, exists: new Uint8Array(out.count), point: null, pairs: null, remarks: [] };
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
  drawn: DrawnTraits,
  walls: Grating | null,
  factor: number | null,
  exists: Uint8Array,
  out: Draws,
  options: SampleOptions,
): PairNotes | null {
  const { guide } = site;
  const unmatched = unmatchedReason(checked);
  const anywhere = exists.some((x) => x === 1);
  const gratings = walls !== null
    ? [walls]
    : Array.from({ length: anywhere ? drawn.size.spectral : 1 }, (_, k) =>
      drawGrating(guide, { duty: drawn.duty[k]!, dutySd: drawn.dutySd[k]!, merged: drawn.merged[k]! }, k));
  const made = anywhere && factor !== null
    ? withSpread(site, gratings, drawn, factor)
    : gratings.map((grating) => ({ grating, profile: site.profile }));
  predictConversion(
    { site, checked, drawn, made, exists, unmatched },
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
    made,
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

/** Where a spread was told of another process: how it was carried over, or that it was not. */
function spreadRemarks(carried: ReturnType<typeof spreadFactor>): string[] {
  if (carried === null) {
    return [
      "mismatch_spread: the scan's spread belongs to another process, and no error of the cross-section explains both: not used",
    ];
  }
  return carried.by === null ? [] : [
    `mismatch_spread: the scan's spread is of another process; used is ${
      carried.factor.toPrecision(3)
    } times it, by the sensitivities to ${carried.by}`,
  ];
}

function indexRemarks(model: PlatformModel, { guide: { geometry }, waves, temperatureC }: Site): string[] {
  const found = [
    model.index.remark(waves.polP, waves.lambdaP, temperatureC, geometry),
    model.index.remark(waves.polS, waves.lambdaS, temperatureC, geometry),
    model.index.remark(waves.polI, waves.lambdaI, temperatureC, geometry),
  ];
  return [...new Set(found.filter((r) => r !== null).flatMap((r) => r.split("\n")))];
}
