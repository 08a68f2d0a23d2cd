// Pure: no I/O, no clock, no hidden randomness.
// Scalar Helmholtz equation on a tensor grid: E_xx + E_yy + k0²(n² − n_s²)E = k0²(N² − n_s²)E, as finite volumes around
// the nodes. Each cell's quarter gives its corner node what it has: flux along the cell's edges, and the index found in
// that quarter, so that a jump of the index on a grid line is met from both sides and second order holds there.
import { type Axis, unknownRange } from "./axis.ts";
import { type SymmetricBand, zeroBand } from "./banded_ldl.ts";
import type { CrossSection } from "./cross_section.ts";

/**
 * Which field is solved for. `scalar`: E, continuous with its slope everywhere: exact for E along the surface of a
 * weakly graded guide. `across`: E across the surface, by H = n²E whose flux H_y/n² is continuous, n² as in the middle
 * of the guide: at side walls, along which it stands, E itself goes on with its slope. `along` is the crystal's index for
 * E along the guide, the scale of depth diffraction (n_s for an isotropic body).
 */
export type FieldKind = { readonly kind: "scalar" } | { readonly kind: "across"; readonly along: number };

/** The eigenproblem A·f = μ·M·f, μ = N² − substrate², M diagonal, f at the unknown nodes with x running fastest. */
export interface ModeMatrix {
  readonly x: Axis;
  readonly y: Axis;
  readonly nx: number;
  readonly ny: number;
  readonly diagonal: Float64Array;
  /** Coupling to the next node in x (0 at a row's end) and in y. */
  readonly nextX: Float64Array;
  readonly nextY: Float64Array;
  /** M: area of each node, times the relative weight of the field kind. m². */
  readonly mass: Float64Array;
  /** Largest n² − substrate² met: an upper bound of μ. */
  readonly highest: number;
}

/** How far beside a node its quarters are looked up, in cells: a jump on a grid line falls on its right side. */
const BESIDE = 1e-6;

/** Assembles the matrix. `lambda`: vacuum wavelength, m. */
export function modeMatrix(
  section: CrossSection,
  x: Axis,
  y: Axis,
  lambda: number,
  field: FieldKind = { kind: "scalar" },
): ModeMatrix {
  const k2 = (2 * Math.PI / lambda) ** 2;
  const { first: x0, count: nx } = unknownRange(x);
  const { first: y0, count: ny } = unknownRange(y);
  const contrast = section.contrast(quarters(x.nodes), quarters(y.nodes));
  const s2 = section.substrate ** 2;
  const wide = 2 * (x.nodes.length - 1);
  const size = nx * ny;
  const diagonal = new Float64Array(size);
  const nextX = new Float64Array(size);
  const nextY = new Float64Array(size);
  const mass = new Float64Array(size);
  let highest = 0;
  const place = (i: number, j: number) =>
    i >= x0 && i < x0 + nx && j >= y0 && j < y0 + ny ? (j - y0) * nx + i - x0 : -1;
  /** Flux between two nodes: the coupling, and its share of both diagonals. */
  const couple = (a: number, b: number, next: Float64Array, flux: number) => {
    if (a >= 0) diagonal[a]! -= flux;
    if (b >= 0) diagonal[b]! -= flux;
    if (a >= 0 && b >= 0) next[a]! += flux;
  };
  const corner = [0, 0, 0, 0];
  for (let j = 0; j + 1 < y.nodes.length; j++) {
    const hy = y.nodes[j + 1]! - y.nodes[j]!;
    for (let i = 0; i + 1 < x.nodes.length; i++) {
      const hx = x.nodes[i + 1]! - x.nodes[i]!;
      const area = hx * hy / 4;
      const at = [place(i, j), place(i + 1, j), place(i, j + 1), place(i + 1, j + 1)] as const;
      for (let c = 0; c < 4; c++) {
        const v = contrast[(2 * j + (c >> 1)) * wide + 2 * i + (c & 1)]!;
        highest = Math.max(highest, v);
        // n_s²/n² in the middle: what multiplies both sides of the equation for H (1 for the scalar field).
        const m = field.kind === "scalar" ? 1 : s2 / (s2 + contrast[(2 * j + (c >> 1)) * wide]!);
        corner[c] = m;
        if (at[c]! < 0) continue;
        mass[at[c]!]! += m * area;
        diagonal[at[c]!]! += m * v * area;
      }
      const acrossX = hy / (4 * hx * k2);
      couple(at[0], at[1], nextX, acrossX * (corner[0]! + corner[1]!));
      couple(at[2], at[3], nextX, acrossX * (corner[2]! + corner[3]!));
      let acrossY = hx / (4 * hy * k2);
      // Only the crystal is anisotropic; the cover (above the surface) is not.
      if (field.kind === "across" && y.nodes[j]! >= 0) acrossY *= s2 / field.along ** 2;
      couple(at[0], at[2], nextY, acrossY * (corner[0]! + corner[2]!));
      couple(at[1], at[3], nextY, acrossY * (corner[1]! + corner[3]!));
    }
  }
  return { x, y, nx, ny, diagonal, nextX, nextY, mass, highest };
}

/** Two places in each cell, just inside its ends. */
function quarters(nodes: Float64Array): Float64Array {
  const out = new Float64Array(2 * (nodes.length - 1));
  for (let k = 0; k + 1 < nodes.length; k++) {
    const beside = BESIDE * (nodes[k + 1]! - nodes[k]!);
    out[2 * k] = nodes[k]! + beside;
    out[2 * k + 1] = nodes[k + 1]! - beside;
  }
  return out;
}

/** out = A·f. */
export function timesMatrix(matrix: ModeMatrix, f: Float64Array, out: Float64Array): Float64Array {
  const { nx, diagonal, nextX, nextY } = matrix;
  const size = f.length;
  for (let k = 0; k < size; k++) out[k] = diagonal[k]! * f[k]!;
  for (let k = 0; k + 1 < size; k++) {
    out[k]! += nextX[k]! * f[k + 1]!;
    out[k + 1]! += nextX[k]! * f[k]!;
  }
  for (let k = 0; k + nx < size; k++) {
    out[k]! += nextY[k]! * f[k + nx]!;
    out[k + nx]! += nextY[k]! * f[k]!;
  }
  return out;
}

/** The Rayleigh quotient fᵀAf/fᵀMf. */
export function rayleighQuotient(matrix: ModeMatrix, f: Float64Array): number {
  const product = timesMatrix(matrix, f, new Float64Array(f.length));
  let above = 0;
  let below = 0;
  for (let k = 0; k < f.length; k++) {
    above += f[k]! * product[k]!;
    below += matrix.mass[k]! * f[k]! * f[k]!;
  }
  return above / below;
}

/**
 * M^−½(shift·M − A)M^−½ as a band along the shorter side: as many negative eigenvalues as modes have μ above the shift.
 * The unknowns stand in the band with the shorter side running fastest ({@link bandOrder}).
 */
export function shiftedBand(matrix: ModeMatrix, shift: number, memory?: Float64Array): SymmetricBand {
  const { nx, ny, diagonal, nextX, nextY, mass } = matrix;
  const size = nx * ny;
  const band = Math.min(nx, ny);
  const out = zeroBand(size, band, memory);
  const { data, stride } = out;
  const place = bandOrder(matrix);
  const root = mass.map(Math.sqrt);
  const [offX, offY] = nx <= ny ? [1, nx] : [ny, 1];
  for (let k = 0; k < size; k++) {
    const at = place(k) * stride;
    data[at] = shift - diagonal[k]! / mass[k]!;
    if ((k + 1) % nx !== 0) data[at + offX]! -= nextX[k]! / (root[k]! * root[k + 1]!);
    if (k + nx < size) data[at + offY]! -= nextY[k]! / (root[k]! * root[k + nx]!);
  }
  return out;
}

/** Place in the band of unknown k. */
export function bandOrder({ nx, ny }: ModeMatrix): (k: number) => number {
  return nx <= ny ? (k) => k : (k) => (k % nx) * ny + Math.floor(k / nx);
}
