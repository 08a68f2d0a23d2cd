// Pure: no I/O, no clock, no hidden randomness.
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { type Figure, figureAbsence, FIGURES } from "../../shared/schemas/figures.ts";
import type { Basis } from "../../shared/vocabulary.ts";
import { type Decision, type Limits, summarise } from "./conformity.ts";
import type { SampleSize } from "./draws.ts";
import { RESTS_ON, type Role } from "./figure_basis.ts";
import { guardBand } from "./guard_band.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import { sampleGuide, type SampleOptions } from "./guide_sample.ts";
import { linearPropagation } from "./linear_propagation.ts";
import type { PlatformModel } from "./platform_model.ts";
import { conclude } from "./predict_guide.ts";
import { followsSpectra } from "./sampling_error.ts";
import { varianceShares } from "./variance_shares.ts";

/** A trait under a figure, and its part in the figure's variance. */
export interface ExplainedTrait {
  readonly key: string;
  readonly trait: string;
  readonly roles: readonly Role[];
  readonly value: number;
  readonly u: number;
  readonly basis: Basis;
  /** Share of the variance that knowing this trait alone would take away; 0 for a trait without u. */
  readonly share: number;
  /** Figure's unit per trait's unit; null where it can't be told. */
  readonly slope: number | null;
}

/** One limit of a requirement, and how far the figure's mean is from it. */
export interface LimitMargin {
  readonly kind: "at_least" | "at_most";
  readonly limit: number;
  /** Distance inside the limit (outside: below 0) in units of u; null where u is 0. */
  readonly margin_u: number | null;
  /** Distance that the request's confidence takes for a normal figure, in units of u; null for a confidence below ½. */
  readonly guard_u: number | null;
}

export interface ExplainedFigure {
  readonly figure: Figure;
  readonly mean: number | null;
  readonly u: number | null;
  readonly uLinear: number | null;
  readonly probability: number | null;
  readonly basis: Basis;
  readonly reason: string | null;
  readonly limits: readonly LimitMargin[];
  /** Largest share first. Empty where the figure does not vary, or has too few values. */
  readonly traits: readonly ExplainedTrait[];
  /** 1 − Σ share: traits acting together, and what gratings of equal statistics differ by. Null without shares. */
  readonly rest: number | null;
  /** A trait without any part gets a share of about this by chance. */
  readonly resolution: number | null;
}

export interface GuideExplanation {
  readonly draws: number;
  readonly spectra: number;
  readonly probability: number;
  readonly decision: Decision;
  readonly limitedBy: Figure | null;
  readonly matched: number;
  readonly figures: readonly ExplainedFigure[];
}

/**
 * Draws of an explanation. Spectra are most of its cost, some 16 times that of a prediction: fractions of a second for one
 * guide that somebody asks about, far too much for a lot.
 */
export const EXPLAIN_SAMPLE: SampleSize = { draws: 1024, spectral: 256 };

export interface ExplainOptions extends SampleOptions {
  readonly size?: SampleSize;
  /** Figures beside those with a requirement; `all` for every one. */
  readonly figures?: readonly Figure[] | "all";
}

/**
 * Why a guide is decided as it is: each required figure (and every one that is asked for) with its uncertainty, sampled and
 * linear, its distance from its limits, and the traits that its variance comes from.
 */
export function explainGuide(
  model: PlatformModel,
  checked: CheckedRequest,
  guide: GuideInputs,
  options: ExplainOptions,
): GuideExplanation {
  const size = options.size ?? EXPLAIN_SAMPLE;
  const sample = sampleGuide(model, checked, guide, options, size);
  const prediction = conclude(checked, guide, sample);
  const { request, requirements, pulsed } = checked;
  const also = options.figures ?? [];
  const shown = FIGURES.filter((figure) =>
    figureAbsence(figure, request.process, pulsed) === null &&
    (requirements.some((r) => r.figure === figure) || also === "all" || also.includes(figure))
  );
  const linear = linearPropagation(sample.drawn.columns, size);
  const figures = shown.map((figure): ExplainedFigure => {
    const found = prediction.figures.find((f) => f.figure === figure)!;
    const draws = sample.figures.of(figure);
    const columns = sample.drawn.columns.filter((c) => c.roles.some((r) => RESTS_ON[figure].includes(r)));
    // A figure that follows the spectra has as many values as there are; later draws repeat them under other traits.
    const n = followsSpectra(draws, size) ? size.spectral : size.draws;
    const shares = varianceShares(
      columns.map(({ key, draws }) => ({ trait: key, draws: draws.subarray(0, n) })),
      draws.subarray(0, n),
    );
    const slopes = linear(figure, draws)?.slopes;
    const traits = shares === null ? [] : columns.map((column, i): ExplainedTrait => ({
      key: column.key,
      trait: column.trait,
      roles: column.roles,
      value: column.value,
      u: column.u,
      basis: column.basis,
      share: column.u === 0 ? 0 : shares.traits[i]!.share,
      slope: slopes?.[sample.drawn.columns.indexOf(column)] ?? null,
    }));
    const limits = requirements.filter((r) => r.figure === figure)
      .flatMap((r) => marginsOf(r, summarise(draws), request.decide.accept_at));
    return {
      figure,
      mean: found.mean,
      u: found.u,
      uLinear: found.uLinear,
      probability: found.probability,
      basis: found.basis,
      reason: found.reason,
      limits,
      traits: traits.sort((a, b) => b.share - a.share),
      rest: shares?.rest ?? null,
      resolution: shares?.resolution ?? null,
    };
  });
  const { probability, decision, limitedBy, matched } = prediction;
  return {
    draws: size.draws,
    spectra: size.spectral,
    probability,
    decision,
    limitedBy,
    matched,
    figures,
  };
}

function marginsOf(
  { atLeast, atMost }: Limits,
  summary: { readonly mean: number; readonly u: number } | null,
  confidence: number,
): LimitMargin[] {
  const guard_u = confidence >= 0.5 && confidence < 1 ? guardBand(1, confidence) : null;
  const margin = (inside: number) => summary === null || summary.u === 0 ? null : inside / summary.u;
  return [
    ...(Number.isFinite(atLeast)
      ? [{
        kind: "at_least" as const,
        limit: atLeast,
        margin_u: margin((summary?.mean ?? NaN) - atLeast),
        guard_u,
      }]
      : []),
    ...(Number.isFinite(atMost)
      ? [{
        kind: "at_most" as const,
        limit: atMost,
        margin_u: margin(atMost - (summary?.mean ?? NaN)),
        guard_u,
      }]
      : []),
  ];
}
