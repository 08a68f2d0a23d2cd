// Pure: no I/O, no clock, no hidden randomness.
import { type Filter, filterBand } from "./filters.ts";

/** An interval of angular frequency, rad/s. */
export type Band = readonly [lower: number, upper: number];

/** Where one arm is integrated. */
export interface ArmWindow {
  /** The stated window: a filter's band, or the window of an unfiltered arm. Purity and pair numbers are of it. */
  readonly stated: Band;
  /**
   * The stated window together with the window that the arm would have without its filter: what a partner photon can
   * be heralded by. Filter factors and single rates need it.
   */
  readonly open: Band;
  readonly filtered: boolean;
  /** Why the stated window does not hold all of the arm's light, or null. */
  readonly cut: string | null;
}

/** Half-width of an unfiltered window: so many zeros of the phase-matching function to each side. */
export const ZEROS = 10;
/** … and not less than so many spectral FWHM of the pump. */
export const PUMP_WIDTHS = 3;
/** An unfiltered window may not reach further than this share of ω. */
export const WIDEST = 0.05;

/** Why an unfiltered arm with an open-ended spectrum has no purity. */
export const NEEDS_FILTERS = "needs filters";

export interface ArmSpan {
  /** Centre, rad/s. */
  readonly centre: number;
  readonly filter?: Filter;
  /** Frequencies where the index model answers, rad/s; default: everywhere. */
  readonly limits?: Band;
}

/**
 * Half-width (rad/s) of an unfiltered arm: max(10·2π/(L|k′_s − k′_i|), 3 pump FWHM).
 * @param length poled length, m
 * @param delay k′_s − k′_i, s/m; at 0 the half-width is Infinity
 * @param pumpFwhm spectral FWHM of the pump's intensity, rad/s; 0 for a continuous wave
 */
export function unfilteredHalfWidth(length: number, delay: number, pumpFwhm: number): number {
  return Math.max(ZEROS * 2 * Math.PI / (length * Math.abs(delay)), PUMP_WIDTHS * pumpFwhm);
}

/**
 * The window of an arm. A half-width beyond ±5 % of ω, or beyond the index model, is cut there and said so.
 * @param halfWidth of the arm without filter, rad/s; see {@link unfilteredHalfWidth}
 * @throws RangeError if the centre or the filter's band lies outside the limits
 */
export function armWindow(arm: ArmSpan, halfWidth: number): ArmWindow {
  const { centre, filter, limits = [0, Infinity] } = arm;
  if (!(centre > limits[0] && centre < limits[1])) {
    throw new RangeError(
      `Cannot place a window: found its centre ${centre} rad/s, need ${limits[0]}…${limits[1]}`,
    );
  }
  const half = Math.min(halfWidth, WIDEST * centre);
  const free: Band = [Math.max(centre - half, limits[0]), Math.min(centre + half, limits[1])];
  const cut = free[0] > centre - halfWidth || free[1] < centre + halfWidth;
  if (filter === undefined) {
    return { stated: free, open: free, filtered: false, cut: cut ? NEEDS_FILTERS : null };
  }
  const stated = filterBand(filter);
  if (!(stated[0] >= limits[0] && stated[1] <= limits[1])) {
    throw new RangeError(
      `Cannot place a filter: found its band ${stated[0]}…${
        stated[1]
      } rad/s, need it within the index model's ${limits[0]}…${limits[1]}`,
    );
  }
  const open: Band = [Math.min(free[0], stated[0]), Math.max(free[1], stated[1])];
  return { stated, open, filtered: true, cut: null };
}

/** Why two arms of one polarisation that share wavelengths have no figures of their own. */
export const NOT_SEPARABLE = "signal and idler not separable";

/** True when a photon can be told to be signal or idler: by its polarisation, or by windows that do not overlap. */
export function armsSeparable(samePolarisation: boolean, signal: Band, idler: Band): boolean {
  return !samePolarisation || signal[1] <= idler[0] || idler[1] <= signal[0];
}

/**
 * Ends of the windows that no filter sets, as one arm sees them (rad/s): its own, and its partner's mirrored by
 * ω_s + ω_i = ω_p. A spectrum that is cut there has no width of its own.
 */
export function openEnds(own: ArmWindow, partner: ArmWindow, omegaP: number): number[] {
  return [
    ...(own.filtered ? [] : own.stated),
    ...(partner.filtered ? [] : partner.stated.map((w) => omegaP - w)),
  ];
}
