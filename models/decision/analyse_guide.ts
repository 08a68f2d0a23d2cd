// Pure: no I/O, no clock, no hidden randomness.
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { conformity, decide, type Decision, type Limits, meets } from "./conformity.ts";
import { DEFAULT_SAMPLE, type SampleSize } from "./draws.ts";
import { RESTS_ON, type Role } from "./figure_basis.ts";
import type { GuideInputs } from "./guide_inputs.ts";
import { type GuideSample, sampleGuide, type SampleOptions } from "./guide_sample.ts";
import type { PlatformModel } from "./platform_model.ts";
import {
  type KnownReadingU,
  type PossibleReading,
  possibleReadings,
  WHOLE_OFFSET,
} from "./possible_readings.ts";
import {
  RESTORE_GROUP_NAMES,
  RESTORE_GROUPS,
  type RestoreAims,
  restoredInputs,
  type RestoreGroup,
} from "./restored_inputs.ts";
import { independentDraws } from "./sampling_error.ts";
import { type OpenDecision, type ReadingValue, valueOfReadings } from "./value_of_reading.ts";

/** A reading that could be taken, and what it would be worth. */
export interface NextReading extends Omit<ReadingValue, "kind"> {
  readonly reading: PossibleReading;
}

/** A guide's probability with a group of traits at its target; `all`: with every group. */
export interface RestoredGuide {
  readonly group: RestoreGroup | "all";
  readonly probability: number;
  readonly decision: Decision;
}

/** What could be done about a guide that is not accepted. */
export interface GuideAnalysis {
  /** Probability as made, of the same draws as the restored ones. */
  readonly probability: number;
  /** Best first; empty unless the guide is held. */
  readonly readings: readonly NextReading[];
  readonly restored: readonly RestoredGuide[];
}

export interface AnalysisQuestion extends RestoreAims {
  /** The decision as it stands. */
  readonly decision: Decision;
  readonly known: KnownReadingU;
}

/** Draws for the value of readings where a figure in doubt follows the spectra: each has its own, or slopes would be mixed. */
const OWN_SPECTRA: SampleSize = { draws: 128, spectral: 128 };

/**
 * Why a guide is not accepted and what may help: for a held one the readings that could still be taken, by what they would
 * settle; and the probability with each group of traits at its target in the model, the others as drawn.
 */
export function analyseGuide(
  model: PlatformModel,
  checked: CheckedRequest,
  guide: GuideInputs,
  question: AnalysisQuestion,
  options: SampleOptions,
): GuideAnalysis {
  const thresholds = thresholdsOf(checked);
  const sampled = (inputs: GuideInputs, size = DEFAULT_SAMPLE) =>
    sampleGuide(model, checked, inputs, options, size);
  const made = sampled(guide);
  const probability = jointOf(checked, made);
  const matched = made.exists.includes(1);
  const restored = (group: RestoreGroup | "all"): RestoredGuide => {
    const groups = (group === "all" ? RESTORE_GROUP_NAMES : [group]).filter((g) => matters(checked, g));
    const found = groups.every((g) => !matched && !movesPoint(guide, g))
      ? probability
      : jointOf(checked, sampled(restoredInputs(guide, groups, checked, question)));
    return { group, probability: found, decision: decide(found, thresholds) };
  };
  return {
    probability,
    readings: question.decision === "hold" ? nextReadings() : [],
    restored: [...RESTORE_GROUP_NAMES, "all" as const].map(restored),
  };

  function nextReadings(): NextReading[] {
    const shared = independentDraws(requiredFigures(checked, made), made.drawn.size) < made.drawn.size.draws;
    const sample = shared ? sampled(guide, OWN_SPECTRA) : made;
    const possible = possibleReadings(model, checked, guide, sample.drawn.columns, question.known);
    return valuedReadings(checked, sample, possible);
  }
}

/** Values of readings for a sampled guide, best first. */
export function valuedReadings(
  checked: CheckedRequest,
  sample: GuideSample,
  possible: readonly PossibleReading[],
): NextReading[] {
  const kinds = possible.map(({ reads }, k) => ({
    kind: String(k),
    reads: reads.map(({ key, u }) => ({ trait: key, u })),
  }));
  return valueOfReadings(openDecision(checked, sample), kinds)
    .map(({ kind, ...value }) => ({ reading: possible[Number(kind)]!, ...value }));
}

const thresholdsOf = ({ request: { decide: at } }: CheckedRequest) => ({
  acceptAt: at.accept_at,
  rejectBelow: at.reject_below,
});

const requiredFigures = ({ requirements }: CheckedRequest, { figures }: GuideSample) =>
  requirements.map((r) => ({ draws: figures.of(r.figure), limits: r as Limits }));

/** Probability that a sampled guide meets every requirement. */
export function jointOf(checked: CheckedRequest, sample: GuideSample): number {
  const met = requiredFigures(checked, sample).map(({ draws, limits }) => meets(draws, limits));
  return conformity(met, sample.exists).joint;
}

/** Whether a group can move a decision: it lies under a required figure, or under the operating point. */
function matters({ requirements }: CheckedRequest, group: RestoreGroup): boolean {
  if (group === "phase_matching" || group === "poling") return true;
  const roles: readonly Role[] = RESTORE_GROUPS[group];
  return requirements.some((r) => RESTS_ON[r.figure].some((role) => roles.includes(role)));
}

/** Whether a group can bring a guide that matches nowhere to an operating point. */
const movesPoint = ({ poling }: GuideInputs, group: RestoreGroup): boolean =>
  group === "phase_matching" || group === "poling" && poling.from === "walls";

/**
 * The decision as its draws leave it open. That a draw has no operating point is a matter of its offset alone: the offset
 * takes its place as a figure, within the limits between which draws match, and a draw beyond them takes its other figures
 * from the next draw that has them, so that a reading which brings it back finds them.
 */
function openDecision(checked: CheckedRequest, sample: GuideSample): OpenDecision {
  const { drawn, exists } = sample;
  const traits = [
    ...drawn.columns.map(({ key, draws, narrowed }) => ({ trait: key, draws: narrowed ?? draws })),
    { trait: WHOLE_OFFSET, draws: drawn.offset },
  ];
  const matching = matchingOffsets(drawn.offset, exists);
  const figures = requiredFigures(checked, sample).map(({ draws, limits }) => ({
    draws: matching === null ? draws : lent(draws, exists),
    limits,
  }));
  // Without such limits a draw that has no point fails, whatever is read.
  const operating = matching === null
    ? { draws: Float64Array.from(exists, (x) => x === 1 ? 1 : NaN), limits: EVERYTHING }
    : { draws: drawn.offset, limits: matching };
  return { traits, figures: [...figures, operating], thresholds: thresholdsOf(checked) };
}

const EVERYTHING: Limits = { atLeast: -Infinity, atMost: Infinity };

/** Limits of the offset half-way to the next draw that does not match; null when matching draws are no single stretch. */
function matchingOffsets(offset: Float64Array, exists: Uint8Array): Limits | null {
  let [least, most] = [Infinity, -Infinity];
  offset.forEach((x, k) => {
    if (exists[k] === 1) [least, most] = [Math.min(least, x), Math.max(most, x)];
  });
  let [below, above] = [-Infinity, Infinity];
  for (let k = 0; k < offset.length; k++) {
    if (exists[k] === 1) continue;
    const x = offset[k]!;
    if (x >= least && x <= most) return null;
    if (x < least) below = Math.max(below, x);
    else above = Math.min(above, x);
  }
  return least > most ? null : { atLeast: (below + least) / 2, atMost: (above + most) / 2 };
}

function lent(draws: Float64Array, exists: Uint8Array): Float64Array {
  const n = draws.length;
  return draws.map((own, k) => {
    if (exists[k] === 1) return own;
    for (let step = 1; step < n; step++) {
      if (exists[(k + step) % n] === 1) return draws[(k + step) % n]!;
    }
    return own;
  });
}
