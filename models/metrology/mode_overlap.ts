// Pure: no I/O, no clock, no hidden randomness.
import type { Uncertain } from "../../shared/vocabulary.ts";

/** A mode as an elliptic Gaussian: full widths at 1/e² of the intensity along x and y, m (twice the field's 1/e radius). */
export interface ModeSize {
  readonly x: Uncertain;
  readonly y: Uncertain;
}

/**
 * Power coupled between two elliptic Gaussian modes with a lateral offset (H. Kogelnik (1964); D. Marcuse, Bell Syst.
 * Tech. J. 56, 703 (1977); from memory): per axis, with S = w₁² + w₂², (2w₁w₂/S)·exp(−2d²/S).
 *
 * u takes the second order along, u² = Σ f_a²u_a² + ½Σ f_ab²u_a²u_b² (JCGM 100, note to 5.1.2): at perfect matching the
 * first derivatives vanish, and the first order alone would claim to know the coupling exactly. Widths and offsets are
 * taken as independent. `value` is the coupling at the given values, not its mean over their errors.
 * @param offset m; default none, exactly
 * @throws RangeError for a width that is not positive, an offset that is not finite, or a negative u
 */
export function modeOverlap(
  a: ModeSize,
  b: ModeSize,
  offset: { readonly x: Uncertain; readonly y: Uncertain } = NO_OFFSET,
): Uncertain {
  const axes = (["x", "y"] as const).map((axis) => {
    for (const width of [a[axis], b[axis]]) {
      if (!(width.value > 0 && width.value < Infinity) || !(width.u >= 0 && width.u < Infinity)) {
        throw new RangeError(
          `Cannot overlap modes: found width ${width.value} m, u ${width.u}, need > 0, u >= 0`,
        );
      }
    }
    if (!Number.isFinite(offset[axis].value) || !(offset[axis].u >= 0 && offset[axis].u < Infinity)) {
      throw new RangeError(
        `Cannot overlap modes: found offset ${offset[axis].value} m, u ${
          offset[axis].u
        }, need finite, u >= 0`,
      );
    }
    return axisOverlap(a[axis], b[axis], offset[axis]);
  });
  const value = axes[0]!.value * axes[1]!.value;
  // In the logarithm the axes separate: f_a = f·g_a, f_ab = f·(g_a g_b + g_ab), with g_ab = 0 across axes.
  let variance = 0;
  for (const one of axes) {
    for (const gu of one.gradient) variance += gu ** 2;
    for (const other of axes) {
      one.gradient.forEach((gu, k) =>
        other.gradient.forEach((hu, l) => {
          const curvature = one === other ? one.curvature[k]![l]! : 0;
          variance += (gu * hu + curvature) ** 2 / 2;
        })
      );
    }
  }
  return { value, u: value * Math.sqrt(variance) };
}

/**
 * The value of {@link modeOverlap} alone, for centred modes and in draws.
 * @param a,b mode-field diameters along x and y, m
 * @throws RangeError for a diameter that is not positive and finite
 */
export function centredOverlap(a: readonly [number, number], b: readonly [number, number]): number {
  let value = 1;
  for (let axis = 0; axis < 2; axis++) {
    const [p, q] = [a[axis]!, b[axis]!];
    if (!(p > 0 && p < Infinity && q > 0 && q < Infinity)) {
      throw new RangeError(`Cannot overlap modes: found widths ${p} m and ${q} m, need > 0`);
    }
    value *= 2 * p * q / (p * p + q * q);
  }
  return value;
}

const NO_OFFSET = { x: { value: 0, u: 0 }, y: { value: 0, u: 0 } };

/** One axis: factor, and first and second derivatives of its logarithm, each times the u of its inputs (w₁, w₂, d). */
function axisOverlap(a: Uncertain, b: Uncertain, offset: Uncertain) {
  const w = [a.value / 2, b.value / 2] as const;
  const u = [a.u / 2, b.u / 2, offset.u] as const;
  const d = offset.value;
  const S = w[0] * w[0] + w[1] * w[1];
  const own = (k: 0 | 1) => 1 / w[k] - 2 * w[k] / S + 4 * d * d * w[k] / (S * S);
  const gradient = [own(0) * u[0], own(1) * u[1], -4 * d / S * u[2]];
  const bend = (k: 0 | 1) =>
    -1 / (w[k] * w[k]) - 2 / S + 4 * w[k] * w[k] / (S * S) + 4 * d * d / (S * S) -
    16 * d * d * w[k] * w[k] / S ** 3;
  const cross = 4 * w[0] * w[1] / (S * S) - 16 * d * d * w[0] * w[1] / S ** 3;
  const shift = (k: 0 | 1) => 8 * d * w[k] / (S * S);
  const second = [
    [bend(0), cross, shift(0)],
    [cross, bend(1), shift(1)],
    [shift(0), shift(1), -4 / S],
  ];
  return {
    value: 2 * w[0] * w[1] / S * Math.exp(-2 * d * d / S),
    gradient,
    curvature: second.map((row, k) => row.map((g, l) => g * u[k]! * u[l]!)),
  };
}
