// Pure: no I/O, no clock, no hidden randomness.

/** Chances that a pair is seen: by one detector, whatever the other does, and by both. Filters included. */
export interface PairDetection {
  readonly signal: number;
  readonly idler: number;
  readonly both: number;
}

/** Dark count rates, 1/s, and the coincidence window, s. */
export interface Darkness {
  readonly signal: number;
  readonly idler: number;
  readonly window: number;
}

/**
 * Coincidences to accidentals of a pulsed source. Per pulse p_x = n̄η_x + dark_x·window, accidentals p_sp_i,
 * CAR = (n̄η_both + p_sp_i)/(p_sp_i). Infinity without light and darks.
 * @param pairs mean pairs per pulse
 * @throws RangeError for a negative or non-finite input, or η_both above η_s or η_i
 */
export function carPulsed(pairs: number, seen: PairDetection, dark: Darkness): number {
  check(pairs, seen, dark);
  const accidentals = (pairs * seen.signal + dark.signal * dark.window) *
    (pairs * seen.idler + dark.idler * dark.window);
  return (pairs * seen.both + accidentals) / accidentals;
}

/**
 * Coincidences to accidentals of a continuous source: singles S_x = rate·η_x + dark_x, accidentals S_sS_i·window.
 * @param rate pairs, 1/s
 * @throws RangeError as {@link carPulsed}
 */
export function carContinuous(rate: number, seen: PairDetection, dark: Darkness): number {
  check(rate, seen, dark);
  const accidentals = (rate * seen.signal + dark.signal) * (rate * seen.idler + dark.idler) * dark.window;
  return (rate * seen.both + accidentals) / accidentals;
}

function check(pairs: number, seen: PairDetection, dark: Darkness): void {
  const values = { pairs, ...seen, darkSignal: dark.signal, darkIdler: dark.idler, window: dark.window };
  for (const [name, value] of Object.entries(values)) {
    if (!(value >= 0 && value < Infinity)) {
      throw new RangeError(`Cannot count accidentals: found ${name} = ${value}, need a finite number >= 0`);
    }
  }
  const most = Math.min(seen.signal, seen.idler);
  if (!(seen.both <= most * (1 + 1e-9))) {
    throw new RangeError(
      `Cannot count accidentals: found joint efficiency ${seen.both}, need at most ${most}`,
    );
  }
}
