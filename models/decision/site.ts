// Pure: no I/O, no clock, no hidden randomness.
import {
  acceptance,
  bandCovering,
  type Grating,
  type GratingSpectrum,
  gratingSpectrum,
  type MismatchProfile,
  spectrumPower,
} from "../poling/mod.ts";
import {
  deviceEfficiency,
  differenceFrequencyPrefactor,
  type LossWeight,
  mixingWeight,
  secondHarmonicPrefactor,
  secondHarmonicWeight,
  type Strength,
  sumFrequencyPrefactor,
} from "../conversion/mod.ts";
import { absent, type Curve, given, type Outcome, tabulate } from "../pairs/mod.ts";
import type { IndexSlice } from "../guides/mod.ts";
import { isDegenerate } from "../../shared/schemas/request.ts";
import type { Process, ThreeWaves } from "../../shared/vocabulary.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import { retune } from "./operating_point.ts";
import type { PlatformModel } from "./platform_model.ts";

/** A guide at its operating point: what all processes need there. */
export interface Site {
  readonly guide: GuideInputs;
  readonly model: PlatformModel;
  readonly waves: ThreeWaves;
  readonly temperatureC: number;
  /** length(T)/length(25 °C). */
  readonly scale: number;
  /** Offset of Δβ that the operating point was found with, 1/m. */
  readonly offset: number;
  /** What the cross-section makes of Δβ as it varies along the guide. */
  readonly profile: MismatchProfile | undefined;
  readonly p: IndexSlice;
  readonly s: IndexSlice;
  readonly i: IndexSlice;
  readonly strength: Strength;
}

/** Gathers a site. @returns the reason when the platform does not know the process */
export function siteAt(
  model: PlatformModel,
  guide: GuideInputs,
  processKey: string,
  waves: ThreeWaves,
  temperatureC: number,
  offset: number,
  profile?: MismatchProfile,
): Site | { readonly reason: string } {
  const d = model.nonlinear(waves);
  if (typeof d !== "number") return d;
  const slice = (pol: "TE" | "TM") => model.index.slice(pol, temperatureC, guide.geometry);
  const [p, s, i] = [slice(waves.polP), slice(waves.polS), slice(waves.polI)];
  let effectiveArea: number;
  try {
    effectiveArea = model.area.effectiveArea(processKey, guide.geometry, waves);
  } catch (error) {
    if (error instanceof RangeError) return { reason: error.message };
    throw error;
  }
  return {
    guide,
    model,
    waves,
    temperatureC,
    scale: model.expansion(temperatureC),
    offset,
    profile,
    p,
    s,
    i,
    strength: {
      waves,
      n: { p: p.n(waves.lambdaP), s: s.n(waves.lambdaS), i: i.n(waves.lambdaI) },
      d: Math.abs(d),
      effectiveArea,
    },
  };
}

/** Δβ with the site's offset, 1/m. */
export function siteMismatch({ p, s, i, offset }: Site, { lambdaP, lambdaS, lambdaI }: ThreeWaves): number {
  return 2 * Math.PI * (p.n(lambdaP) / lambdaP - s.n(lambdaS) / lambdaS - i.n(lambdaI) / lambdaI) + offset;
}

/** Poled length at temperature, m. */
export const siteLength = ({ guide, scale }: Site): number => guide.poledLength * scale;

/** What is scanned for the acceptance, and its name in the output's units. */
export interface Scan {
  /** Wavelength (m) at which the scan is centred. */
  readonly centre: number;
  waves(lambda: number): ThreeWaves;
}

/**
 * The wave that an acceptance is scanned in: the fundamental (second harmonic), the pump at fixed ω_s/ω_p (pairs), and
 * otherwise the weak input, the other input fixed: the idler of a sum frequency, the signal of a difference frequency.
 */
export function acceptanceScan(process: Process, waves: ThreeWaves): Scan {
  const { lambdaP, lambdaS, lambdaI } = waves;
  switch (process) {
    case "second-harmonic":
      return { centre: lambdaS, waves: (l) => ({ ...waves, lambdaP: l / 2, lambdaS: l, lambdaI: l }) };
    case "pair-generation":
      return { centre: lambdaP, waves: (l) => retune(waves, l) };
    case "sum-frequency":
      return {
        centre: lambdaI,
        waves: (l) => ({ ...waves, lambdaI: l, lambdaP: 1 / (1 / lambdaS + 1 / l) }),
      };
    case "difference-frequency":
      return {
        centre: lambdaS,
        waves: (l) => ({ ...waves, lambdaS: l, lambdaI: 1 / (1 / lambdaP - 1 / l) }),
      };
  }
}

/** Loss weight and prefactor of the process whose efficiency is stated; pairs state that of their reverse. */
export interface Conversion {
  readonly process: "second-harmonic" | "sum-frequency" | "difference-frequency";
  /** 1/(W·m²). */
  readonly prefactor: number;
  weight(alphas: { readonly p: number; readonly s: number; readonly i: number }): LossWeight;
}

export function conversionOf(process: Process, site: Site): Conversion {
  const { strength, guide, scale, waves } = site;
  const length = guide.length * scale;
  const stated = process !== "pair-generation"
    ? process
    : isDegenerate(waves)
    ? "second-harmonic"
    : "sum-frequency";
  switch (stated) {
    case "second-harmonic": {
      // Within the tolerance of energy conservation signal and idler are one fundamental.
      const lambda = 2 * waves.lambdaP;
      const one = { ...strength, waves: { ...waves, lambdaS: lambda, lambdaI: lambda } };
      return {
        process: stated,
        prefactor: secondHarmonicPrefactor(one),
        weight: (a) => secondHarmonicWeight(a, length),
      };
    }
    case "sum-frequency":
      return {
        process: stated,
        prefactor: sumFrequencyPrefactor(strength),
        weight: ({ p, s, i }) => mixingWeight({ a: s, b: i, out: p }, length),
      };
    case "difference-frequency":
      return {
        process: stated,
        prefactor: differenceFrequencyPrefactor(strength),
        weight: ({ p, s, i }) => mixingWeight({ a: p, b: s, out: i }, length),
      };
  }
}

/** Half-width of the scan for an acceptance, in line widths 2π/L. */
const SCAN_WIDTHS = 6;
/** No acceptance is looked for further than this share of the wavelength away. */
const SCAN_LIMIT = 0.05;
/** Points of the spectrum behind one acceptance at most. */
const MOST_WIDTHS = 400;

/** The response of one grating at a site. */
export interface Response {
  /** |φ|² at the operating point, with the loss weight's decay but not its amplitude. */
  readonly power: number;
  /** FWHM in the scanned wavelength, m. */
  readonly acceptance: Outcome;
}

/** Nodes of Δβ over the scanned wavelengths: with six-point interpolation exact to 1e-9 of a line width. */
const SCAN_NODES = 65;

/** |φ|² at the operating point and the acceptance around it, of gratings at one site: what they share is done once. */
export function responder(
  site: Site,
  scan: Scan,
): (grating: Grating, profile: MismatchProfile | undefined, decay: number) => Response {
  const { guide, scale, waves } = site;
  const width = 2 * Math.PI / siteLength(site);
  const here = siteMismatch(site, waves);
  const window = scanWindow(site, scan, here, width);
  const reach = MOST_WIDTHS * width;
  const low = Math.max(Math.min(here, window?.low ?? here), here - reach);
  const high = Math.min(Math.max(here, window?.high ?? here), here + reach);
  const mismatch = window === null
    ? null
    : tabulate((l) => siteMismatch(site, scan.waves(l)), window.from, window.to, SCAN_NODES);
  return (grating, profile, decay) => {
    const band = bandCovering(low, high, (grating.end - grating.start) * scale);
    const spectrum = gratingSpectrum(grating, band, {
      decay,
      scale,
      poledLength: guide.poledLength,
      ...(profile === undefined ? {} : { profile }),
    });
    return { power: spectrumPower(spectrum, here), acceptance: acceptanceOf(spectrum, mismatch) };
  };
}

interface ScanWindow {
  readonly from: number;
  readonly to: number;
  readonly low: number;
  readonly high: number;
}

/** Wavelengths around the centre over which Δβ moves by a few line widths, and the Δβ they reach. */
function scanWindow(site: Site, scan: Scan, here: number, width: number): ScanWindow | null {
  const at = (lambda: number): number | null => {
    try {
      return siteMismatch(site, scan.waves(lambda));
    } catch (error) {
      if (error instanceof RangeError) return null; // beyond the index
      throw error;
    }
  };
  let low = here;
  let high = here;
  const edge = (direction: 1 | -1): number => {
    let step = 1e-5 * scan.centre;
    let x = scan.centre;
    while (Math.abs(x - scan.centre) < SCAN_LIMIT * scan.centre) {
      const next = at(x + direction * step);
      if (next === null) break;
      x += direction * step;
      low = Math.min(low, next);
      high = Math.max(high, next);
      if (Math.abs(next - here) > SCAN_WIDTHS * width) break;
      step *= 1.5;
    }
    return x;
  };
  const from = edge(-1);
  const to = edge(1);
  return from < to ? { from, to, low, high } : null;
}

function acceptanceOf(spectrum: GratingSpectrum, mismatch: Curve | null): Outcome {
  if (mismatch === null) return absent("no index around the operating point to scan over");
  // Between the samples that bounded it Δβ may turn: a wave beyond the spectrum's band is as dark as its edge.
  const last = spectrum.first + (spectrum.re.length - 1) * spectrum.step;
  const clamp = (x: number) => Math.min(last, Math.max(spectrum.first, x));
  const found = acceptance(spectrum, (lambda) => clamp(mismatch.at(lambda)), [mismatch.lo, mismatch.hi]);
  if (found.width === null) return absent(`no half maximum within ${100 * SCAN_LIMIT} % of the wavelength`);
  return given(found.width, "acceptance");
}

/** η of a grating's response. */
export function efficiencyOf(conversion: Conversion, site: Site, power: number, weight: LossWeight) {
  return deviceEfficiency(conversion.prefactor, siteLength(site), power * weight.amplitude ** 2);
}
