// Pure: no I/O, no clock, no hidden randomness.
import { lossyUniform, pairWeight } from "../conversion/mod.ts";
import { bareReflectivity } from "../metrology/mod.ts";
import {
  absent,
  type ArmOptics,
  assembleFigures,
  type Filter,
  given,
  newPairScratch,
  type Outcome,
  PAIR_FIGURES,
  type PairChain,
  type PairFigure,
  type PairPump,
  type PairScratch,
  type PairSource,
  type PairSpectrum,
  pairSpectrumDraws,
  pulse,
  pulseWidth,
  recordedPulse,
} from "../pairs/mod.ts";
import { type Grating, gratingSpectrum } from "../poling/mod.ts";
import type { ArmRequest, CheckedRequest, FilterRequest } from "../../shared/schemas/request.ts";
import { lambdaOf, nm, omegaOf } from "../../shared/units.ts";
import type { Polarisation } from "../../shared/vocabulary.ts";
import { between, carried } from "./blend_spectra.ts";
import type { DrawnArm, DrawnTraits } from "./drawn_traits.ts";
import type { FigureDraws } from "./figure_draws.ts";
import type { ArmTraits } from "./guide_inputs.ts";
import { convertingStretches } from "./grating_draws.ts";
import { armCoupling, couplingRemarks } from "./fibre_coupling.ts";
import type { MadeGrating } from "./mismatch_draws.ts";
import { type Site, siteLength } from "./site.ts";

/** A pump spectrum as recorded: vacuum wavelength (m) and intensity per wavelength on a free scale. */
export interface RecordedSpectrum {
  readonly lambda: Float64Array;
  readonly intensity: Float64Array;
}

/** What the request's pump is at a wavelength (m) that it may have been tuned to. */
export function pairPump(
  checked: CheckedRequest,
  lambdaP: number,
  recorded: RecordedSpectrum | null,
): PairPump {
  const pump = checked.request.pump!;
  const averagePower = pump.average_power_mw! * 1e-3;
  if (!checked.pulsed) return { kind: "continuous", averagePower };
  const gdd = pump.gdd_fs2 * 1e-30;
  const repetition = pump.repetition_mhz! * 1e6;
  if (recorded !== null) {
    const points = Array.from(
      recorded.lambda,
      (lambda, k) => ({ lambda, intensity: recorded.intensity[k]! }),
    );
    const spectrum = recordedPulse(points, lambdaP, gdd, checked.waves.lambdaP);
    return { kind: "pulsed", spectrum, averagePower, repetition };
  }
  const shape = pump.shape === "sech" ? "sech" : "gaussian";
  // The pulse's own width belongs to the nominal wavelength: a tuned laser keeps its duration.
  const fwhm = pump.fwhm_ps !== undefined
    ? pump.fwhm_ps * 1e-12
    : pulseWidth(shape, nm(pump.fwhm_nm!), checked.waves.lambdaP);
  return { kind: "pulsed", spectrum: pulse(shape, fwhm, lambdaP, gdd), averagePower, repetition };
}

const filterOf = (filter: FilterRequest, lambda: number): Filter => ({
  shape: filter.shape,
  fwhm: nm(filter.fwhm_nm),
  peak: filter.peak,
  centre: filter.centre_nm === undefined ? lambda : nm(filter.centre_nm),
});

/** φ of a grating at a site, with pump loss (1/m). */
function gratingAt(
  { guide, scale, offset }: Site,
  { grating, profile }: MadeGrating,
  lossP: number,
): PairSource["spectrum"] {
  const { decay } = pairWeight(lossP);
  const options = {
    decay,
    scale,
    poledLength: guide.poledLength,
    ...(profile === undefined ? {} : { profile }),
  };
  // The source counts Δβ without the offset that a scan found; a constant phase is all that the shift leaves out.
  return (band) => ({
    ...gratingSpectrum(grating, { ...band, first: band.first + offset }, options),
    first: band.first,
  });
}

/** The source that gratings of one spectrum make of a site. Filters keep to the request's wavelengths when the pump is tuned. */
export function pairSource(
  site: Site,
  checked: CheckedRequest,
  pump: PairPump,
  spectrum: PairSource["spectrum"],
): PairSource {
  const { waves, p, s, i, strength } = site;
  const omegaS = omegaOf(waves.lambdaS);
  const omegaP = omegaOf(waves.lambdaP);
  const { signal, idler } = checked.request;
  const filters = {
    ...(signal.filter === undefined ? {} : { signal: filterOf(signal.filter, checked.waves.lambdaS) }),
    ...(idler?.filter === undefined ? {} : { idler: filterOf(idler.filter, checked.waves.lambdaI) }),
  };
  const limits = (pol: Polarisation) => {
    const [shortest, longest] = site.model.index.range(pol, site.guide.geometry).lambda;
    return [omegaOf(longest), omegaOf(shortest)] as const;
  };
  return {
    omegaP,
    omegaS,
    omegaI: omegaP - omegaS,
    kP: (omega) => 2 * Math.PI * p.n(lambdaOf(omega)) / lambdaOf(omega),
    kS: (omega) => 2 * Math.PI * s.n(lambdaOf(omega)) / lambdaOf(omega),
    kI: (omega) => 2 * Math.PI * i.n(lambdaOf(omega)) / lambdaOf(omega),
    limits: { signal: limits(waves.polS), idler: limits(waves.polI) },
    samePolarisation: waves.polS === waves.polI,
    d: strength.d,
    effectiveArea: strength.effectiveArea,
    length: siteLength(site),
    spectrum,
    pump,
    filters,
  };
}

/** Optics of one arm behind the guide, draw by draw. */
function armOptics(
  site: Site,
  arm: "signal" | "idler",
  traits: ArmTraits,
  drawn: DrawnArm,
  request: ArmRequest | undefined,
): (k: number) => ArmOptics {
  const n = arm === "signal" ? site.strength.n.s : site.strength.n.i;
  const outside = request?.outside_index ?? site.model.outsideIndex;
  const bare = bareReflectivity({ value: n, u: 0 }, outside).value;
  const detector: Outcome = request?.detector === undefined
    ? absent(`the request gives no detector for the ${arm}`)
    : given(request.detector.efficiency);
  const coupling = armCoupling(site, arm, traits, drawn, request);
  return (k) => ({
    facet: given(1 - (drawn.reflectivity === null ? bare : drawn.reflectivity[k]!)),
    coupling: coupling(k),
    detector,
    dark: request?.detector?.dark_hz ?? 0,
  });
}

/** Notes beside the figures of a source. */
export interface PairNotes {
  /** Stated windows, m: [shortest, longest]. */
  readonly windowS: readonly [number, number];
  readonly windowI: readonly [number, number];
  /** Delay of the largest exchange overlap, s. */
  readonly exchangeDelay: number | null;
  readonly gridPoints: number;
  readonly remarks: readonly string[];
}

export interface PairQuestion {
  readonly site: Site;
  readonly checked: CheckedRequest;
  readonly recorded: RecordedSpectrum | null;
  readonly drawn: DrawnTraits;
  /** Gratings of the spectral draws; one, if all draws have the same. */
  readonly made: readonly MadeGrating[];
  /** The inspected grating, when there is one. */
  readonly walls: Grating | null;
  /** Per draw, whether it has an operating point. */
  readonly exists: Uint8Array;
  /** Why there is none, for the draws that have none. */
  readonly unmatched: string;
  readonly g2Limit: number | undefined;
}

/**
 * Draws of all pair figures of one guide. Spectra are computed for the spectral draws, the first ones, each with its
 * own pump loss and grating; later draws take them in turn, with pair numbers rescaled to their own pump loss and duty.
 */
export function predictPairs(
  question: PairQuestion,
  out: FigureDraws<PairFigure>,
  scratch = newPairScratch(),
): PairNotes {
  const { site, checked, drawn, walls } = question;
  const { guide, scale, waves } = site;
  const pump = pairPump(checked, waves.lambdaP, question.recorded);
  const spectra = pairSpectra(question, pump, scratch);
  const { request } = checked;
  const signal = armOptics(site, "signal", guide.signal, drawn.signal, request.signal);
  const idler = armOptics(site, "idler", guide.idler, drawn.idler, request.idler);
  // Windows may say that a stretch has no domains: any of the gratings that follow them shows it.
  const shown = walls ?? (guide.poling.from === "windows" ? question.made[0]!.grating : null);
  const poled = convertingStretches(guide, shown).map((s) => ({ from: s.from * scale, to: s.to * scale }));
  let notes: PairNotes | null = null;
  const remarks = new Set<string>(couplingRemarks(site, checked));
  for (let k = 0; k < drawn.size.draws; k++) {
    const j = k % spectra.length;
    const spectrum = scaledCounts(spectra[j]!, madeRatio(question, k, j));
    const chain: PairChain = {
      guideLength: guide.length * scale,
      poled,
      losses: { pump: drawn.lossP[k]!, signal: drawn.lossS[k]!, idler: drawn.lossI[k]! },
      signal: signal(k),
      idler: idler(k),
      window: request.window_ns * 1e-9,
      ...(question.g2Limit === undefined ? {} : { g2Limit: question.g2Limit }),
      ...(question.exists[k] === 1 ? {} : { unmatched: question.unmatched }),
    };
    const result = assembleFigures(spectrum, pump, chain);
    for (const name of PAIR_FIGURES) out.set(name, k, result.figures[name]);
    if (k === 0) {
      const { windowS, windowI, exchangeDelay, grid } = result;
      notes = { windowS, windowI, exchangeDelay, gridPoints: grid.points, remarks: [] };
    }
    // The numbers in a remark are the first draw's: what counts is that it applies.
    for (const remark of result.remarks) {
      if (![...remarks].some((r) => sameRemark(r, remark))) remarks.add(remark);
    }
  }
  return { ...notes!, remarks: [...remarks] };
}

const sameRemark = (a: string, b: string) => a.split(":", 1)[0] === b.split(":", 1)[0];

/**
 * Spectra of the spectral draws. The first is refined until it has converged and decides how fine a grid is needed; the
 * others are computed on half as many points and carry the first one's accuracy with them.
 */
function pairSpectra(question: PairQuestion, pump: PairPump, scratch: PairScratch): PairSpectrum[] {
  const { site, checked, drawn, exists } = question;
  const spectrumOf = (k: number) =>
    gratingAt(site, question.made[k % question.made.length]!, drawn.lossP[k]!);
  const { refined: first, base, draw } = pairSpectrumDraws(
    pairSource(site, checked, pump, spectrumOf(0)),
    scratch,
  );
  // Without any operating point only the filter's share is asked for: one spectrum is enough.
  if (!exists.some((x) => x === 1)) return [first];
  const draws = Array.from({ length: drawn.size.spectral }, (_, k) => k);
  if (question.made.length > 1) {
    return draws.map((k) => k === 0 ? first : carried(first, base, draw(spectrumOf(k))));
  }
  // One grating for all leaves pump loss alone to vary, and that weakly: linear between its extremes.
  const byLoss = [...draws].sort((a, b) => drawn.lossP[a]! - drawn.lossP[b]!);
  const [least, most] = [byLoss[0]!, byLoss.at(-1)!];
  const span = drawn.lossP[most]! - drawn.lossP[least]!;
  if (span === 0) return [first];
  const [low, high] = [draw(spectrumOf(least)), draw(spectrumOf(most))];
  return draws.map((k) =>
    k === 0 ? first : carried(first, base, between(low, high, (drawn.lossP[k]! - drawn.lossP[least]!) / span))
  );
}

/** Pairs made in draw k relative to draw j, whose spectrum it takes: pump loss and duty act on the number alone. */
function madeRatio({ site, drawn, walls }: PairQuestion, k: number, j: number): number {
  if (k === j) return 1;
  const { guide, scale } = site;
  const one = (n: number) => {
    const from = guide.poledFrom * scale;
    const length = siteLength(site);
    const loss = lossyUniform(0, drawn.lossP[n]! / 2, length) * Math.exp(-drawn.lossP[n]! * from);
    return loss *
      (walls === null && guide.poling.from === "duty" ? Math.sin(Math.PI * drawn.duty[n]!) ** 2 : 1);
  };
  return one(k) / one(j);
}

function scaledCounts(spectrum: PairSpectrum, ratio: number): PairSpectrum {
  if (ratio === 1) return spectrum;
  const { correlation } = spectrum;
  return {
    ...spectrum,
    made: spectrum.made * ratio,
    madeOpen: spectrum.madeOpen * ratio,
    correlation: correlation === null ? null : {
      trace: correlation.trace * ratio,
      traceFiltered: correlation.traceFiltered * ratio,
      heralds: correlation.heralds * ratio,
      square: correlation.square * ratio ** 2,
      squareHalf: correlation.squareHalf * ratio ** 2,
      squareFiltered: correlation.squareFiltered * ratio ** 2,
    },
  };
}
