// Pure: no I/O, no clock, no hidden randomness.
import {
  equivalentKernel,
  integrateUniform,
  type LitGuide,
  type LossWeight,
  lossyUniform,
  peakConversion,
  photonCoupling,
} from "../conversion/mod.ts";
import { absent, given, type Outcome } from "../pairs/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { toNm, toPercentPerW, toPercentPerWCm2 } from "../../shared/units.ts";
import type { DrawnTraits } from "./drawn_traits.ts";
import type { FigureDraws } from "./figure_draws.ts";
import type { MadeGrating } from "./mismatch_draws.ts";
import {
  acceptanceScan,
  conversionOf,
  efficiencyOf,
  responder,
  type Response,
  type Site,
  siteLength,
} from "./site.ts";

export type ConversionFigure =
  | "efficiency_percent_per_w"
  | "efficiency_percent_per_w_cm2"
  | "acceptance_nm"
  | "peak_conversion";

export interface ConversionQuestion {
  readonly site: Site;
  readonly checked: CheckedRequest;
  readonly drawn: DrawnTraits;
  /** Gratings of the spectral draws; one, if all draws have the same. */
  readonly made: readonly MadeGrating[];
  readonly exists: Uint8Array;
  readonly unmatched: string;
}

/**
 * Draws of efficiency, acceptance and peak conversion. The response of each grating is computed once, with the losses of
 * its own draw; later draws take the responses in turn, rescaled to their own losses and duty by the closed form of a
 * uniform lossy grating (exact for a uniform one).
 */
export function predictConversion(question: ConversionQuestion, out: FigureDraws<ConversionFigure>): void {
  const { site, checked, drawn, made } = question;
  const { process } = checked.request;
  const count = drawn.size.draws;
  const conversion = conversionOf(process, site);
  const alphas = (k: number) => ({ p: drawn.lossP[k]!, s: drawn.lossS[k]!, i: drawn.lossI[k]! });
  const weights = Array.from({ length: count }, (_, k) => conversion.weight(alphas(k)));
  const respond = responder(site, acceptanceScan(process, site.waves));
  const responses: Response[] = made.map(({ grating, profile }, j) =>
    respond(grating, profile, weights[j]!.decay)
  );
  const power = inputPower(checked);
  for (let k = 0; k < count; k++) {
    if (question.exists[k] !== 1) {
      for (
        const name of ["efficiency_percent_per_w", "efficiency_percent_per_w_cm2", "acceptance_nm"] as const
      ) {
        out.set(name, k, absent(question.unmatched));
      }
      if (process !== "pair-generation") out.set("peak_conversion", k, absent(question.unmatched));
      continue;
    }
    const j = k % responses.length;
    const { acceptance, power: own } = responses[j]!;
    const phiSquared = own * ratio(question, k, j, weights[k]!, weights[j]!);
    const { perW, perWm2 } = efficiencyOf(conversion, site, phiSquared, weights[k]!);
    out.set("efficiency_percent_per_w", k, given(toPercentPerW(perW), "efficiency"));
    out.set("efficiency_percent_per_w_cm2", k, given(toPercentPerWCm2(perWm2), "efficiency"));
    out.set("acceptance_nm", k, acceptance.value === null ? acceptance : given(toNm(acceptance.value)));
    if (process === "pair-generation") continue;
    out.set(
      "peak_conversion",
      k,
      power === null ? absent(NO_POWER) : converted(question, power, phiSquared, weights[k]!, alphas(k)),
    );
  }
}

const NO_POWER = "the request gives no power of an input";

/** |φ|² of draw k relative to draw j with the same grating: loss and duty act on the size of the response alone. */
function ratio(
  { site, drawn }: ConversionQuestion,
  k: number,
  j: number,
  own: LossWeight,
  other: LossWeight,
): number {
  if (k === j) return 1;
  const length = siteLength(site);
  const from = site.guide.poledFrom * site.scale;
  const loss = (w: LossWeight) => lossyUniform(0, w.decay, length) * Math.exp(-2 * w.decay * from);
  const duty = site.guide.poling.from === "duty"
    ? (Math.sin(Math.PI * drawn.duty[k]!) / Math.sin(Math.PI * drawn.duty[j]!)) ** 2
    : 1;
  return duty * loss(own) / loss(other);
}

/** Powers (W) of the inputs that the request states, null when it states none. */
function inputPower({ request }: CheckedRequest): LitGuide["power"] | null {
  const watts = (milliwatts: number | undefined) => (milliwatts ?? 0) * 1e-3;
  const s = watts(request.signal.average_power_mw);
  const i = watts(request.idler?.average_power_mw);
  const p = watts(request.pump?.average_power_mw);
  const power = request.process === "second-harmonic"
    ? { p: 0, s: (s > 0 ? s : i) / 2, i: (s > 0 ? s : i) / 2 }
    : request.process === "sum-frequency"
    ? { p: 0, s, i }
    : { p, s, i: 0 };
  return power.p + power.s + power.i > 0 ? power : null;
}

function converted(
  { site, checked }: ConversionQuestion,
  power: LitGuide["power"],
  phiSquared: number,
  weight: LossWeight,
  alpha: LitGuide["alpha"],
): Outcome {
  const { guide, scale, strength } = site;
  const section = { start: guide.poledFrom * scale, length: siteLength(site) };
  const kernel = equivalentKernel(Math.sqrt(phiSquared), weight.decay, section);
  const lit: LitGuide = {
    waves: strength.waves,
    coupling: photonCoupling(strength),
    alpha,
    power,
    guideLength: guide.length * scale,
  };
  const process = checked.request.process as Exclude<CheckedRequest["request"]["process"], "pair-generation">;
  return given(peakConversion(process, lit, (l) => integrateUniform(l, section, kernel)), "peak conversion");
}
