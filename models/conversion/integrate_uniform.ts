// Pure: no I/O, no clock, no hidden randomness.
import { lossyUniform } from "./closed_forms.ts";
import { type LitGuide, omegas, requireLitGuide, type WaveValues } from "./three_waves.ts";

/** Where the coupling acts, m from the input facet. */
export interface PoledSection {
  readonly start: number;
  readonly length: number;
}

/** The fourth-order rule errs by about (rate·h)⁵/120 a step: 1e-12 over a guide that converts fully. */
const RATE_PER_STEP = 0.02;
const LEAST_STEPS = 16;

/**
 * The |φ| that a lossless uniform section needs to give the same low-depletion answer as a real grating:
 * |φ|/|mean of e^{−decay·z} over the section|.
 * @param phi |φ| with e^{−decay·z} in it (without the amplitude of the loss weight)
 * @param decay 1/m, of the process's loss weight
 */
export function equivalentKernel(phi: number, decay: number, { start, length }: PoledSection): number {
  return phi * Math.exp(decay * start) / Math.sqrt(lossyUniform(0, decay, length));
}

/**
 * Powers at the output facet, W, of a section that couples evenly and in phase, with depletion and loss: what a
 * grating does when its imperfections are spread evenly along it. Fast, for use in draws. At low depletion it equals
 * η·P·P exactly. It departs from `integrateDomains` where the missing strength has a place or a phase: away from the
 * peak, with a dead stretch, or with a drift of the mismatch; there depletion alters the interference.
 * @param kernel equivalent |φ|, 2/π for an ideal first-order grating: `equivalentKernel()`
 * @throws RangeError for an impossible guide, or a section that reaches outside it
 */
export function integrateUniform(guide: LitGuide, section: PoledSection, kernel: number): WaveValues {
  requireLitGuide(guide);
  const { alpha, power, guideLength } = guide;
  const { start, length } = section;
  const slack = 1e-9 * guideLength;
  if (!(start >= -slack && length > 0 && start + length <= guideLength + slack)) {
    throw new RangeError(
      `Cannot convert: found a poled section from ${start} m, ${length} m long, need it inside 0 to ${guideLength} m`,
    );
  }
  if (!(kernel >= 0 && kernel < Infinity)) {
    throw new RangeError(`Cannot convert: found kernel ${kernel}, need a finite number >= 0`);
  }
  const omega = omegas(guide.waves);
  const coupling = guide.coupling * kernel;
  const before = (a: number) => Math.exp(-a * start / 2);
  const entry = {
    p: before(alpha.p) * Math.sqrt(power.p / omega.p),
    s: before(alpha.s) * Math.sqrt(power.s / omega.s),
    i: before(alpha.i) * Math.sqrt(power.i / omega.i),
  };
  const out = inPhase(entry, alpha, coupling, length);
  const after = (a: number) => Math.exp(-a * Math.max(0, guideLength - start - length));
  return {
    p: omega.p * out.p ** 2 * after(alpha.p),
    s: omega.s * out.s ** 2 * after(alpha.s),
    i: omega.i * out.i ** 2 * after(alpha.i),
  };
}

/**
 * At phase matching, with one wave empty at the start, the three amplitudes keep their phases and real numbers do:
 * sum frequency (p made) p′ = gsi, s′ = −gpi, i′ = −gps; difference frequency (i made) i′ = gps, s′ = gpi, p′ = −gsi,
 * and with s made the same. Classical fourth-order Runge–Kutta.
 */
function inPhase(entry: WaveValues, alpha: WaveValues, coupling: number, length: number): WaveValues {
  const toPump = entry.p === 0 ? 1 : -1;
  const g = coupling * toPump;
  const [halfP, halfS, halfI] = [alpha.p / 2, alpha.s / 2, alpha.i / 2];
  const most = Math.sqrt(entry.p ** 2 + entry.s ** 2 + entry.i ** 2);
  const rate = 2 * coupling * most + Math.max(Math.abs(halfP), Math.abs(halfS), Math.abs(halfI));
  const steps = Math.max(LEAST_STEPS, Math.ceil(rate * length / RATE_PER_STEP));
  const h = length / steps;
  let { p, s, i } = entry;
  for (let n = 0; n < steps; n++) {
    let dp = g * s * i - halfP * p;
    let ds = -g * p * i - halfS * s;
    let di = -g * p * s - halfI * i;
    let [sumP, sumS, sumI] = [dp, ds, di];
    for (let k = 1; k < 4; k++) {
      const part = k === 3 ? h : h / 2;
      const [P, S, I] = [p + part * dp, s + part * ds, i + part * di];
      dp = g * S * I - halfP * P;
      ds = -g * P * I - halfS * S;
      di = -g * P * S - halfI * I;
      const times = k === 3 ? 1 : 2;
      sumP += times * dp;
      sumS += times * ds;
      sumI += times * di;
    }
    p += h / 6 * sumP;
    s += h / 6 * sumS;
    i += h / 6 * sumI;
  }
  return { p, s, i };
}
