// Pure: no I/O, no clock, no hidden randomness.
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { type Figure, figureAbsence, FIGURES } from "../../shared/schemas/figures.ts";
import type { Basis } from "../../shared/vocabulary.ts";
import { conformity, decide, type Decision, meets, summarise } from "./conformity.ts";
import { DEFAULT_SAMPLE, type SampleSize } from "./draws.ts";
import { basisOf } from "./figure_basis.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import { type GuideSample, sampleGuide, type SampleOptions } from "./guide_sample.ts";
import { linearPropagation } from "./linear_propagation.ts";
import type { PairNotes } from "./pair_prediction.ts";
import type { PlatformModel } from "./platform_model.ts";
import { settledAt } from "./sampling_error.ts";
import { restsOnPlatformAlone, withheld } from "./unread.ts";

/** One figure of one guide. Without a value: the reason. Units are in the figure's name. */
export interface PredictedFigure {
  readonly figure: Figure;
  readonly mean: number | null;
  readonly u: number | null;
  /** Standard uncertainty by linear propagation, beside the sampled `u`; null where slopes can't be told. */
  readonly uLinear: number | null;
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
  /** Draws that all this was made of. */
  readonly draws: number;
  /** False where more draws could still change the decision. */
  readonly settled: boolean;
  /** Share of draws that have an operating point. */
  readonly matched: number;
  /** Further temperatures that match, °C. */
  readonly otherTemperatures: readonly number[];
  readonly pairs: PairNotes | null;
  readonly remarks: readonly string[];
}

export interface PredictOptions extends SampleOptions {
  /** Draws to begin with; {@link DEFAULT_SAMPLE} if left out. */
  readonly size?: SampleSize;
  /** While the decision is not settled the sample grows fourfold up to this many draws; not at all if left out. */
  readonly mostDraws?: number;
}

/** Each larger sample is this many times the one before. */
const GROWTH = 4;

/**
 * All figures of one guide for one request, by seeded sampling; the same inputs give the same answer to the bit. Where the
 * decision hangs on the error of the sample, a larger one is taken if the options allow it.
 */
export function predictGuide(
  model: PlatformModel,
  checked: CheckedRequest,
  guide: GuideInputs,
  options: PredictOptions,
): GuidePrediction {
  let size = options.size ?? DEFAULT_SAMPLE;
  for (;;) {
    const prediction = conclude(checked, guide, sampleGuide(model, checked, guide, options, size));
    const larger = { draws: GROWTH * size.draws, spectral: GROWTH * size.spectral };
    if (prediction.settled || larger.draws > (options.mostDraws ?? 0)) return prediction;
    size = larger;
  }
}

/** Sums a sample up: every figure, what the requirements say, and what limits. */
export function conclude(checked: CheckedRequest, guide: GuideInputs, sample: GuideSample): GuidePrediction {
  const { request, requirements } = checked;
  const { figures: out, exists, drawn, point, pairs, remarks } = sample;
  const met = requirements.map((r) => meets(out.of(r.figure), r));
  const { joint, each, limiting } = conformity(met, exists);
  const matched = exists.reduce((sum, x) => sum + x, 0) / out.count;
  const weakest = limiting === null ? 1 : each[limiting]!;
  const limitedBy = matched < weakest
    ? "operating_temperature_c"
    : limiting === null
    ? null
    : requirements[limiting]!.figure;
  const linear = linearPropagation(drawn.columns, drawn.size);
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
        uLinear: linear(figure, out.of(figure))?.u ?? null,
        lo: summary?.lo ?? null,
        hi: summary?.hi ?? null,
        probability: own.length === 0 ? null : conformity(own, new Uint8Array(out.count).fill(1)).joint,
        basis: basisOf(figure, guide),
        reason: summary === null ? reason ?? "not computed" : absentIn,
      };
    });
  const { accept_at: acceptAt, reject_below: rejectBelow } = request.decide;
  const thresholds = { acceptAt, rejectBelow };
  const asked = requirements.map((r) => ({ draws: out.of(r.figure), limits: r }));
  const unread = restsOnPlatformAlone(guide, requirements.map((r) => r.figure), drawn.columns);
  const held = withheld(decide(joint, thresholds), joint, unread);
  return {
    figures,
    probability: joint,
    decision: held.decision,
    limitedBy,
    draws: out.count,
    settled: settledAt(joint, asked, drawn.size, thresholds),
    matched,
    otherTemperatures: point?.others ?? [],
    pairs,
    remarks: [...remarks, ...held.remarks],
  };
}
