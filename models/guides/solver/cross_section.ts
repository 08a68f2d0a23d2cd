// Pure: no I/O, no clock, no hidden randomness.
// What the solver needs to know of a guide's cross-section at one wavelength and temperature.

/**
 * A cross-section: x sideways from the middle of the guide, y down into the crystal from its surface (m). The guide is
 * symmetric in x.
 */
export interface CrossSection {
  /** Index of the crystal far from the guide; a mode is guided if its index is higher. */
  readonly substrate: number;
  /**
   * n² − substrate² at every (x, y), x running fastest. Where the index jumps, the solver asks beside the jump, so
   * the value on it does not matter.
   */
  readonly contrast: (xs: Float64Array, ys: Float64Array) => Float64Array;
}

/** A guide under a plane surface at y = 0, with what its grid has to follow. */
export interface GuideSection extends CrossSection {
  /** Index above the surface. */
  readonly cover: number;
  /** Places x > 0 where the index jumps, m. */
  readonly edges: readonly number[];
  /** Lengths over which the index varies sideways and in depth, m: the grid is even over about these. */
  readonly scaleX: number;
  readonly scaleY: number;
}

/** Contrast of a uniform cover above a separable depth law: increase(strength(x)·shape(y)) below the surface. */
export function coveredContrast(
  substrate: number,
  cover: number,
  increase: (amount: number) => number,
  lateral: (x: number) => number,
  depth: (y: number) => number,
): CrossSection["contrast"] {
  const above = cover * cover - substrate * substrate;
  return (xs, ys) => {
    const across = xs.map(lateral);
    const out = new Float64Array(xs.length * ys.length);
    ys.forEach((y, j) => {
      const at = j * xs.length;
      if (y < 0) {
        out.fill(above, at, at + xs.length);
        return;
      }
      const down = depth(y);
      for (let i = 0; i < xs.length; i++) {
        const dn = increase(across[i]! * down);
        out[at + i] = dn * (2 * substrate + dn); // (substrate + dn)² − substrate² without cancellation
      }
    });
    return out;
  };
}
