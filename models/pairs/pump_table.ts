// Pure: no I/O, no clock, no hidden randomness.
import type { WaveNumbers } from "./amplitude.ts";
import type { PumpSpectrum } from "./pump.ts";

/** Least number of points on which the pump factor is tabulated. */
const PUMP_POINTS = 2048;
const MOST_PUMP_POINTS = 32768;
/** Largest change of the pump factor's phase from point to point, rad. */
const PUMP_PHASE_STEP = 0.1;

/** The pump's factor α(Ω)·e^{i(k_p − k_p0 − k′_p0Ω)·centre}, tabulated over its support. */
export interface PumpTable {
  readonly lo: number;
  readonly perStep: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** The last table of a source's wave numbers: its grids and gratings share pump and centre. */
const kept = new WeakMap<WaveNumbers, { pump: PumpSpectrum; centre: number; table: PumpTable }>();

/** The table of a pump for gratings about `centre` (m). */
export function pumpTable(pump: PumpSpectrum, k: WaveNumbers, centre: number): PumpTable {
  const held = kept.get(k);
  if (held !== undefined && held.pump === pump && held.centre === centre) return held.table;
  const table = tabulatePump(pump, k, centre);
  kept.set(k, { pump, centre, table });
  return table;
}

function tabulatePump(pump: PumpSpectrum, k: WaveNumbers, centre: number): PumpTable {
  const span = pump.hi - pump.lo;
  const bend = (x: number) => pump.gdd * x * x / 2 + (k.pump.at(x) - k.pumpDelay * x) * centre;
  // the phase is close to a parabola: its slope is largest at an end
  const h = span * 1e-3;
  const fastest = Math.max(
    Math.abs(bend(pump.lo + h) - bend(pump.lo)),
    Math.abs(bend(pump.hi) - bend(pump.hi - h)),
  ) / h;
  const wanted = Math.ceil(fastest * span / PUMP_PHASE_STEP);
  const n = Math.min(Math.max(wanted, PUMP_POINTS), MOST_PUMP_POINTS);
  const step = span / (n - 1);
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  for (let q = 0; q < n; q++) {
    const x = q === n - 1 ? pump.hi : pump.lo + q * step;
    const size = pump.envelope(x);
    const phase = bend(x);
    re[q] = size * Math.cos(phase);
    im[q] = size * Math.sin(phase);
  }
  return { lo: pump.lo, perStep: 1 / step, re, im };
}

/** Cubic interpolation of the table at Ω. */
export function lookUp(table: PumpTable, x: number, out: { re: number; im: number }): void {
  const u = (x - table.lo) * table.perStep;
  const { re, im } = table;
  const last = re.length - 4;
  let i = Math.floor(u) - 1;
  i = i < 0 ? 0 : i > last ? last : i;
  const a = u - i, b = a - 1, c = a - 2, d = a - 3;
  const w0 = -b * c * d / 6, w1 = a * c * d / 2, w2 = -a * b * d / 2, w3 = a * b * c / 6;
  out.re = w0 * re[i]! + w1 * re[i + 1]! + w2 * re[i + 2]! + w3 * re[i + 3]!;
  out.im = w0 * im[i]! + w1 * im[i + 1]! + w2 * im[i + 2]! + w3 * im[i + 3]!;
}
