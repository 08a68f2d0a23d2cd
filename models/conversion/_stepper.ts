// Pure: no I/O, no clock, no hidden randomness.
import { gaussCollocation } from "./_gauss.ts";

const { count: N, node: NODE, weight: WEIGHT, a: A } = gaussCollocation(8);
const MOST_SWEEPS = 60;

/** Largest phase of Δβ in one step, rad: 8 nodes integrate e^{ix} over it to 1e-14 of the step. */
export const PHASE_PER_STEP = 3.3;
/** Largest g·√(photon flux)·h in one step: the sweeps below then contract by 0.3 or better. */
export const COUPLING_PER_STEP = 0.15;

/** Within one step the phase of the mismatch is phase + rate·x + curve·x²/2, x from the step's start. */
export interface StepPhase {
  readonly phase: number;
  readonly rate: number;
  readonly curve: number;
}

/**
 * Steps of the three-wave equations in photon-flux amplitudes a = √(P/ω) e^{i…}, `state` = re, im of a_p, a_s, a_i:
 *
 *   da_p/dz = −α_p a_p/2 + i g d a_s a_i  e^{−iΦ},   da_s/dz = −α_s a_s/2 + i g d a_p a_i* e^{iΦ},   a_i as a_s.
 *
 * Loss is taken out exactly (c = a·e^{αx/2}), so what is integrated is lossless in form and Gauss collocation keeps
 * its Manley–Rowe sums to rounding.
 */
export class ThreeWaveStepper {
  readonly state = new Float64Array(6);
  readonly #stage = new Float64Array(6 * N);
  readonly #slope = new Float64Array(6 * N);
  /** re, im of the coupling of p, then of s, then of i at every node. */
  readonly #drive = new Float64Array(6 * N);

  constructor(readonly alphaP: number, readonly alphaS: number, readonly alphaI: number) {}

  /** Loss alone over a length x. */
  decay(x: number): void {
    const alphas = [this.alphaP, this.alphaS, this.alphaI];
    for (let k = 0; k < 6; k++) this.state[k]! *= Math.exp(-alphas[k >> 1]! * x / 2);
  }

  /** All the photons: by Manley and Rowe no wave can come to hold more than that. */
  photons(): number {
    let sum = 0;
    for (let k = 0; k < 6; k++) sum += this.state[k]! ** 2;
    return sum;
  }

  /** One step of length h with signed coupling g·d. @throws RangeError if the sweeps do not settle */
  step(h: number, coupling: number, at: StepPhase): void {
    this.#prepare(h, coupling, at);
    const { state } = this;
    const stage = this.#stage;
    const slope = this.#slope;
    for (let j = 0; j < N; j++) stage.set(state, 6 * j);
    const settled = 4e-16 * Math.sqrt(this.photons());
    for (let sweep = 0;; sweep++) {
      this.#slopes();
      let change = 0;
      for (let j = 0; j < N; j++) {
        for (let q = 0; q < 6; q++) {
          let sum = 0;
          for (let k = 0; k < N; k++) sum += A[j * N + k]! * slope[6 * k + q]!;
          const next = state[q]! + sum;
          change = Math.max(change, Math.abs(next - stage[6 * j + q]!));
          stage[6 * j + q] = next;
        }
      }
      if (change <= settled) break;
      if (!(sweep < MOST_SWEEPS)) {
        throw new RangeError(`Cannot integrate the coupled waves: a step of ${h} m still moves by ${change}`);
      }
    }
    this.#slopes();
    for (let q = 0; q < 6; q++) {
      let sum = 0;
      for (let k = 0; k < N; k++) sum += WEIGHT[k]! * slope[6 * k + q]!;
      state[q]! += sum;
    }
    this.decay(h);
  }

  #prepare(h: number, coupling: number, { phase, rate, curve }: StepPhase): void {
    const { alphaP, alphaS, alphaI } = this;
    const lossless = alphaP === 0 && alphaS === 0 && alphaI === 0;
    for (let k = 0; k < N; k++) {
      const x = NODE[k]! * h;
      const angle = phase + x * (rate + curve * x / 2);
      const re = h * coupling * Math.cos(angle);
      const im = h * coupling * Math.sin(angle);
      const lossP = lossless ? 1 : Math.exp((alphaP - alphaS - alphaI) * x / 2);
      const lossS = lossless ? 1 : Math.exp((alphaS - alphaP - alphaI) * x / 2);
      const lossI = lossless ? 1 : Math.exp((alphaI - alphaP - alphaS) * x / 2);
      // i·e^{−iΦ} = sin Φ + i cos Φ and i·e^{iΦ} = −sin Φ + i cos Φ
      this.#drive.set([im * lossP, re * lossP, -im * lossS, re * lossS, -im * lossI, re * lossI], 6 * k);
    }
  }

  #slopes(): void {
    const x = this.#stage;
    const f = this.#slope;
    const d = this.#drive;
    for (let o = 0; o < 6 * N; o += 6) {
      const pr = x[o]!, pi = x[o + 1]!, sr = x[o + 2]!, si = x[o + 3]!, ir = x[o + 4]!, ii = x[o + 5]!;
      let re = sr * ir - si * ii;
      let im = sr * ii + si * ir;
      f[o] = d[o]! * re - d[o + 1]! * im;
      f[o + 1] = d[o]! * im + d[o + 1]! * re;
      re = pr * ir + pi * ii; // a_p·a_i*
      im = pi * ir - pr * ii;
      f[o + 2] = d[o + 2]! * re - d[o + 3]! * im;
      f[o + 3] = d[o + 2]! * im + d[o + 3]! * re;
      re = pr * sr + pi * si; // a_p·a_s*
      im = pi * sr - pr * si;
      f[o + 4] = d[o + 4]! * re - d[o + 5]! * im;
      f[o + 5] = d[o + 4]! * im + d[o + 5]! * re;
    }
  }
}
