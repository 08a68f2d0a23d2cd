// Pure: no I/O, no clock, no hidden randomness.
import { mismatchOverTemperature } from "../guides/mod.ts";
import { bandForPeak, type Grating, gratingSpectrum, mainPeaks } from "../poling/mod.ts";
import type { ThreeWaves } from "../../shared/vocabulary.ts";
import {
  type OperatingPoint,
  type OperatingPoints,
  type OperatingQuestion,
  retune,
} from "./operating_point.ts";
import { type PlatformModel, validTemperatures } from "./platform_model.ts";

/** Operating points of many draws that differ in the offset of Δβ alone. */
export interface OperatingDraws {
  readonly temperatureC: Float64Array;
  /** 1 where the draw has an operating point. */
  readonly matched: Uint8Array;
  /** Pump wavelength, m. */
  readonly lambdaP: Float64Array;
}

/** Steps of the oven's range: Δβ bends so little over one that a straight line holds the temperature to 1e-3 °C. */
const TEMPERATURE_STEPS = 240;
/** Steps of the pump's range, and of the oven's at each of them. */
const PUMP_STEPS = 120;
const COARSE_STEPS = 16;

/**
 * Re-tunes the oven for every draw. What a draw needs is need(T) = target/s(T) − Δβ(T), s the expansion and target the
 * scaled Δβ that matches (±2π/Λ, or the peak that the nominal guide is run on): tabulated once, each draw is a look-up.
 * Where a draw has no root and the pump may be tuned, the nearest wavelength whose oven range reaches the offset is taken.
 */
export function drawOperatingPoints(
  model: PlatformModel,
  question: OperatingQuestion,
  points: OperatingPoints,
  nominal: OperatingPoint,
  nominalOffset: number,
  offsets: Float64Array,
): OperatingDraws {
  const certain = offsets.every((x) => x === offsets[0]);
  const curve = certain ? null : needCurve(model, question, nominal, nominalOffset);
  const out: OperatingDraws = {
    temperatureC: new Float64Array(offsets.length),
    matched: new Uint8Array(offsets.length),
    lambdaP: new Float64Array(offsets.length),
  };
  let pumps: PumpReach[] | null = null;
  offsets.forEach((offset, k) => {
    if (curve === null) {
      const here = certain && offset === nominalOffset ? nominal : points.at(offset);
      out.temperatureC[k] = here.temperatureC;
      out.matched[k] = here.matched ? 1 : 0;
      out.lambdaP[k] = here.waves.lambdaP;
      return;
    }
    out.lambdaP[k] = question.waves.lambdaP;
    const found = lowestRoot(curve, offset);
    out.temperatureC[k] = found.temperatureC;
    out.matched[k] = found.matched ? 1 : 0;
    if (found.matched || question.tunable === null) return;
    pumps ??= pumpReach(model, question, curve.target);
    const tuned = nearestPump(pumps, question, offset);
    if (tuned === null) return;
    out.temperatureC[k] = tuned.temperatureC;
    out.lambdaP[k] = tuned.lambdaP;
    out.matched[k] = 1;
  });
  return out;
}

interface NeedCurve {
  readonly target: number;
  readonly temperature: Float64Array;
  readonly need: Float64Array;
}

/** The curve of a guide, or null where it can't be told: then every draw is searched for by itself. */
function needCurve(
  model: PlatformModel,
  question: OperatingQuestion,
  nominal: OperatingPoint,
  nominalOffset: number,
): NeedCurve | null {
  const range = ovenRange(model, question, question.waves);
  if (range === null || range[0] === range[1]) return null;
  const bare = mismatchOverTemperature(model.index, question.waves, question.geometry);
  const middle = (range[0] + range[1]) / 2;
  let target = Math.sign(bare(middle) + nominalOffset) * 2 * Math.PI / question.period;
  if (question.walls !== null) {
    if (nominal.matched && !nominal.tuned) {
      target = (bare(nominal.temperatureC) + nominalOffset) * model.expansion(nominal.temperatureC);
    } else {
      // Nothing to take the peak from: it is the highest one near the grating vector.
      const found = highestPeak(question, question.walls, target);
      if (found === null) return null;
      target = found;
    }
  }
  const temperature = Float64Array.from(
    { length: TEMPERATURE_STEPS + 1 },
    (_, k) => range[0] + (range[1] - range[0]) * k / TEMPERATURE_STEPS,
  );
  return { target, temperature, need: temperature.map((T) => target / model.expansion(T) - bare(T)) };
}

/** Scaled Δβ (1/m, signed) at the highest peak of |φ|² near a grating vector (1/m, signed). */
function highestPeak(
  { period, poledLength, profile }: OperatingQuestion,
  walls: Grating,
  vector: number,
): number | null {
  const band = bandForPeak(vector, vector, period, walls.end - walls.start);
  const options = { poledLength, ...(profile === undefined ? {} : { profile }) };
  return mainPeaks(gratingSpectrum(walls, band, options))[0]?.deltaBeta ?? null;
}

function ovenRange(model: PlatformModel, { oven, geometry }: OperatingQuestion, waves: ThreeWaves) {
  const valid = validTemperatures(model, waves, geometry);
  if ("reason" in valid) return null;
  const low = Math.max(oven[0], valid.range[0]);
  const high = Math.min(oven[1], valid.range[1]);
  return low <= high ? [low, high] as const : null;
}

/** The lowest temperature at which the curve reaches the offset, else the one at which it comes nearest. */
function lowestRoot(
  { temperature, need }: NeedCurve,
  offset: number,
): { temperatureC: number; matched: boolean } {
  let nearest = 0;
  for (let k = 0; k < need.length; k++) {
    const here = need[k]! - offset;
    if (here === 0) return { temperatureC: temperature[k]!, matched: true };
    if (k > 0) {
      const before = need[k - 1]! - offset;
      if (before * here < 0) {
        const t = before / (before - here);
        return {
          temperatureC: temperature[k - 1]! + t * (temperature[k]! - temperature[k - 1]!),
          matched: true,
        };
      }
    }
    if (Math.abs(here) < Math.abs(need[nearest]! - offset)) nearest = k;
  }
  return { temperatureC: temperature[nearest]!, matched: false };
}

/** At one pump wavelength, the offsets that some temperature of the oven matches, and the temperatures at both ends. */
interface PumpReach {
  readonly lambdaP: number;
  readonly low: number;
  readonly high: number;
  readonly atLow: number;
  readonly atHigh: number;
}

function pumpReach(model: PlatformModel, question: OperatingQuestion, target: number): PumpReach[] {
  const [from, to] = question.tunable!;
  const out: PumpReach[] = [];
  for (let k = 0; k <= PUMP_STEPS; k++) {
    const lambdaP = from + (to - from) * k / PUMP_STEPS;
    const waves = retune(question.waves, lambdaP);
    const range = ovenRange(model, question, waves);
    if (range === null) continue;
    const bare = mismatchOverTemperature(model.index, waves, question.geometry);
    const reach = { lambdaP, low: Infinity, high: -Infinity, atLow: range[0], atHigh: range[0] };
    for (let n = 0; n <= COARSE_STEPS; n++) {
      const T = range[0] + (range[1] - range[0]) * n / COARSE_STEPS;
      const need = target / model.expansion(T) - bare(T);
      if (need < reach.low) [reach.low, reach.atLow] = [need, T];
      if (need > reach.high) [reach.high, reach.atHigh] = [need, T];
    }
    out.push(reach);
  }
  return out;
}

/** The wavelength nearest to nominal at which the offset is reached; between two steps on a straight line. */
function nearestPump(
  pumps: readonly PumpReach[],
  { waves }: OperatingQuestion,
  offset: number,
): { lambdaP: number; temperatureC: number } | null {
  let best: { lambdaP: number; temperatureC: number } | null = null;
  const offer = (lambdaP: number, temperatureC: number) => {
    if (best === null || Math.abs(lambdaP - waves.lambdaP) < Math.abs(best.lambdaP - waves.lambdaP)) {
      best = { lambdaP, temperatureC };
    }
  };
  pumps.forEach((here, k) => {
    if (offset >= here.low && offset <= here.high) {
      offer(here.lambdaP, offset - here.low < here.high - offset ? here.atLow : here.atHigh);
    }
    const before = pumps[k - 1];
    if (before === undefined) return;
    for (const [edge, at] of [["low", "atLow"], ["high", "atHigh"]] as const) {
      const [a, b] = [before[edge] - offset, here[edge] - offset];
      if (a * b >= 0) continue;
      const t = a / (a - b);
      offer(before.lambdaP + t * (here.lambdaP - before.lambdaP), before[at] + t * (here[at] - before[at]));
    }
  });
  return best;
}
