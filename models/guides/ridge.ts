// Pure: no I/O, no clock, no hidden randomness.
// Thin-film ridge by two slab steps: the film in and beside the ridge, then the ridge sideways. Vertical side walls,
// scalar at the corners. For strongly confining ridges a few 1e-3 in n_eff are an honest accuracy.
import { slabField, slabIndex, type SlabPolarisation } from "./slab.ts";

/** A ridge etched into a film on a buffer. Lengths in m. */
export interface Ridge {
  /** Index of the film for the field of the mode. */
  readonly film: number;
  readonly buffer: number;
  readonly cover: number;
  readonly filmThickness: number;
  readonly etchDepth: number;
  readonly width: number;
}

/** The ridge's fundamental mode as a product of fields (E, largest value about 1), heights from the buffer up, m. */
export interface RidgeMode {
  readonly index: number;
  readonly lateral: (x: number) => number;
  readonly height: (y: number) => number;
}

/**
 * Fundamental mode, or null if it is not guided. `pol`: TE has its field along the film, TM across it.
 * @throws RangeError unless 0 < etch depth < film thickness
 */
export function ridgeMode(ridge: Ridge, pol: SlabPolarisation, lambda: number): RidgeMode | null {
  const { film, buffer, cover, filmThickness, etchDepth, width } = ridge;
  if (!(etchDepth > 0 && etchDepth < filmThickness)) {
    throw new RangeError(
      `Cannot solve a ridge etched ${etchDepth} m into a film of ${filmThickness} m: need 0 < etch depth < film thickness`,
    );
  }
  const vertical = { core: film, substrate: buffer, cover, thickness: filmThickness };
  const core = slabIndex(vertical, pol, lambda);
  if (core === null) return null;
  // Where the thinned film does not guide, light beside the ridge would be in the buffer.
  const beside = slabIndex({ ...vertical, thickness: filmThickness - etchDepth }, pol, lambda) ?? buffer;
  const sideways = { core, substrate: beside, cover: beside, thickness: width };
  // A field along the film is across the side walls, and the other way round.
  const across: SlabPolarisation = pol === "TE" ? "TM" : "TE";
  const index = slabIndex(sideways, across, lambda);
  if (index === null) return null;
  const h = slabField(vertical, pol, lambda, core);
  const l = slabField(sideways, across, lambda, index);
  // The component across an interface jumps: E = H/n² there, scaled to the core.
  const height = pol === "TE"
    ? h
    : (y: number) => h(y) * (y < 0 ? film / buffer : y > filmThickness ? film / cover : 1) ** 2;
  const lateral = across === "TE"
    ? (x: number) => l(x + width / 2)
    : (x: number) => l(x + width / 2) * (Math.abs(x) > width / 2 ? core / beside : 1) ** 2;
  return { index, lateral, height };
}

/**
 * Effective area of the overlap of three ridge modes, 1/|∫∫ e_p e_s e_i|² with ∫∫ e² = 1 over everything and the
 * overlap over the film only (buffer and cover have no second-order response), m².
 */
export function ridgeArea(ridge: Ridge, p: RidgeMode, s: RidgeMode, i: RidgeMode): number {
  const { filmThickness, etchDepth, width } = ridge;
  const far = 4e-6;
  const triple = (side: "lateral" | "height", from: number, to: number) =>
    midpoints(from, to, (x) => p[side](x) * s[side](x) * i[side](x));
  const norm = (mode: RidgeMode) => {
    const square = (side: "lateral" | "height", from: number, to: number) =>
      midpoints(from, to, (x) => mode[side](x) ** 2);
    return (square("height", -far, 0) + square("height", 0, filmThickness) +
      square("height", filmThickness, filmThickness + far)) *
      2 * (square("lateral", 0, width / 2) + square("lateral", width / 2, width / 2 + far));
  };
  const overlap = 2 * (triple("lateral", 0, width / 2) * triple("height", 0, filmThickness) +
    triple("lateral", width / 2, width / 2 + far) * triple("height", 0, filmThickness - etchDepth));
  return norm(p) * norm(s) * norm(i) / (overlap * overlap);
}

/** Midpoint rule on 800 steps: never evaluates on an interface, where a field may jump. */
function midpoints(from: number, to: number, f: (x: number) => number): number {
  const n = 800;
  const step = (to - from) / n;
  let sum = 0;
  for (let k = 0; k < n; k++) sum += f(from + (k + 0.5) * step);
  return sum * step;
}

/** Index of fused silica near 20 °C: I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965), from memory. `lambda` in m. */
export function silicaIndex(lambda: number): number {
  const x = (lambda * 1e6) ** 2;
  return Math.sqrt(
    1 + 0.6961663 * x / (x - 0.0684043 ** 2) + 0.4079426 * x / (x - 0.1162414 ** 2) +
      0.8974794 * x / (x - 9.896161 ** 2),
  );
}
