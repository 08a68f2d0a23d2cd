// Pure: no I/O, no clock, no hidden randomness.
// Three-layer step-index slab, exact: H. Kogelnik & V. Ramaswamy, Appl. Opt. 13, 1857 (1974).

/** A film of index `core` and thickness `thickness` (m) between two half-spaces. */
export interface Slab {
  readonly core: number;
  readonly substrate: number;
  readonly cover: number;
  readonly thickness: number;
}

/** `TE`: field parallel to the layers; `TM`: field across them. */
export type SlabPolarisation = "TE" | "TM";

/** Σ of the boundary phases and the film's own: m·π at mode m, falling as N rises. */
function phase(slab: Slab, pol: SlabPolarisation, k0: number, N: number): number {
  const { core, substrate, cover, thickness } = slab;
  const kappa = Math.sqrt(core * core - N * N);
  const half = (outside: number) => {
    const ratio = pol === "TE" ? 1 : (core / outside) ** 2;
    return Math.atan2(ratio * Math.sqrt(Math.max(0, N * N - outside * outside)), kappa);
  };
  return k0 * thickness * kappa - half(substrate) - half(cover);
}

/**
 * Effective index of mode `order` at the vacuum wavelength `lambda` (m), or null if it is not guided.
 * @throws RangeError unless the core has the highest index and thickness and wavelength are positive
 */
export function slabIndex(slab: Slab, pol: SlabPolarisation, lambda: number, order = 0): number | null {
  const outside = Math.max(slab.substrate, slab.cover);
  if (!(slab.core > outside && outside >= 1 && slab.thickness > 0 && lambda > 0)) {
    throw new RangeError(
      `Cannot solve a slab of indices ${slab.substrate}, ${slab.core}, ${slab.cover} and thickness ${slab.thickness} m at ${lambda} m: need a core of the highest index, and positive lengths`,
    );
  }
  const k0 = 2 * Math.PI / lambda;
  if (phase(slab, pol, k0, outside) <= order * Math.PI) return null;
  let lo = outside;
  let hi = slab.core;
  for (let step = 0; step < 200 && hi > lo; step++) {
    const middle = (lo + hi) / 2;
    if (middle === lo || middle === hi) break;
    if (phase(slab, pol, k0, middle) > order * Math.PI) lo = middle;
    else hi = middle;
  }
  return (lo + hi) / 2;
}

/**
 * Field of the fundamental mode of effective index `N` against height (m) above the film's lower face, at most 1: E of
 * a TE mode; of a TM mode H, whose E across the layers is H/n² times a constant.
 */
export function slabField(
  slab: Slab,
  pol: SlabPolarisation,
  lambda: number,
  N: number,
): (height: number) => number {
  const { core, substrate, cover, thickness } = slab;
  const k0 = 2 * Math.PI / lambda;
  const kappa = k0 * Math.sqrt(core * core - N * N);
  const decay = (outside: number) => k0 * Math.sqrt(Math.max(0, N * N - outside * outside));
  const ratio = pol === "TE" ? 1 : (core / substrate) ** 2;
  const shift = Math.atan2(ratio * decay(substrate), kappa);
  const inside = (y: number) => Math.cos(kappa * y - shift);
  const bottom = inside(0);
  const top = inside(thickness);
  return (y) =>
    y < 0
      ? bottom * Math.exp(decay(substrate) * y)
      : y > thickness
      ? top * Math.exp(-decay(cover) * (y - thickness))
      : inside(y);
}
