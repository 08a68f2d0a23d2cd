// Pure: no I/O, no clock, no hidden randomness.
// A guide's mode on three nested grids: each one's answer is the next one's shift, and the last two are extrapolated to
// step 0. The first differences say how far the grids had converged.
import type { GuideSection } from "./cross_section.ts";
import { eigenpair, type Memory } from "./eigen.ts";
import { gridAxes, type GridCells, type GridPlan, type Parity, planGrid } from "./guide_grid.ts";
import { type FieldKind, type ModeMatrix, modeMatrix } from "./mode_matrix.ts";
import { type ModeField, modeField, refinedStart } from "./mode_field.ts";

/** A guided mode. */
export interface SolvedMode extends ModeField {
  readonly cutOff: false;
  /** Vacuum wavelength, m. */
  readonly lambda: number;
  readonly substrate: number;
  /** Effective index, extrapolated to step 0. */
  readonly nEff: number;
  /** n_eff − substrate, without the rounding of the difference. */
  readonly excess: number;
  /** n_eff on the three grids (steps 4h, 2h, h), before extrapolation. */
  readonly grids: readonly [number, number, number];
  /** Twice what the last extrapolation moved n_eff by: above the error that is left on every grid tried. */
  readonly gridError: number;
  /** Even modes are numbered 0, 1 … by falling index, odd ones likewise. */
  readonly order: number;
  /** What was solved for (E, or n²E for a field across the surface) at the unknown nodes of the grid. */
  readonly vector: Float64Array;
}

/** No guided mode: a result, not an error. */
export interface CutOff {
  readonly cutOff: true;
  readonly reason: string;
}

export interface SolveOptions {
  readonly parity?: Parity;
  readonly order?: number;
  /** Finest grid; default 100 × 152 (half of the guide). */
  readonly cells?: GridCells;
  readonly field?: FieldKind;
  /** Shared working memory for many solutions one after the other. */
  readonly memory?: Memory;
  /** N² − substrate² expected, if known: saves the search. */
  readonly guess?: number;
}

export const DEFAULT_CELLS: GridCells = { x: 100, y: 152 };
/** Decay lengths of the field in the crystal that the grid holds: e^−18 in μ. */
const TAILS = 9;
/** First guess of the reach, and the farthest that a grid goes, m. */
const FIRST_REACH = 40e-6;
export const FARTHEST = 250e-6;
const NEAREST = 8e-6;
/** A mode that still has e^−3 of its field at the farthest end is called cut off. */
const HELD_TAILS = 3;

/** Solves one mode of a guide at a vacuum wavelength (m). */
export function solveGuide(
  section: GuideSection,
  lambda: number,
  options: SolveOptions = {},
): SolvedMode | CutOff {
  const { parity = "even", order = 0, cells = DEFAULT_CELLS, field, memory = {} } = options;
  const k0 = 2 * Math.PI / lambda;
  const matrixOn = (plan: GridPlan, refine: number): ModeMatrix => {
    const { x, y } = gridAxes(plan, refine);
    return modeMatrix(section, x, y, lambda, field);
  };
  const cutOff = (): CutOff => ({
    cutOff: true,
    reason: `no guided ${parity} mode of order ${order} at ${Number((lambda * 1e9).toFixed(3))} nm (cut-off)`,
  });

  // How far the field reaches follows from its index: settle both on the coarsest grid.
  let reach = FIRST_REACH;
  let plan = planGrid(section, lambda, parity, cells, reach);
  let coarse = eigenpair(matrixOn(plan, 1), order, { memory, ...given(options.guess) });
  for (let round = 0; round < 4; round++) {
    const wanted = coarse === null
      ? FARTHEST
      : Math.min(FARTHEST, Math.max(NEAREST, TAILS / (k0 * Math.sqrt(coarse.mu))));
    if (Math.abs(wanted - reach) < 0.1 * reach) break;
    reach = wanted;
    plan = planGrid(section, lambda, parity, cells, reach);
    coarse = eigenpair(matrixOn(plan, 1), order, { memory, ...given(coarse?.mu) });
  }
  const middleMatrix = matrixOn(plan, 2);
  const middle = eigenpair(middleMatrix, order, { memory, ...given(coarse?.mu) });
  const guess = middle === null
    ? undefined
    : coarse === null
    ? middle.mu
    : middle.mu + (middle.mu - coarse.mu) / 4;
  const fineMatrix = matrixOn(plan, 4);
  const start = middle === null ? undefined : refinedStart(middleMatrix, middle.vector, fineMatrix);
  const fine = eigenpair(fineMatrix, order, {
    memory,
    ...given(guess),
    ...(start === undefined ? {} : { start }),
  });
  if (fine === null) return cutOff();
  const { mu, error } = extrapolated(coarse?.mu ?? null, middle?.mu ?? null, fine.mu);
  if (!(mu > 0) || k0 * Math.sqrt(mu) * reach < HELD_TAILS) return cutOff();
  const index = (m: number) => Math.sqrt(section.substrate ** 2 + m);
  const nEff = index(mu);
  return {
    cutOff: false,
    lambda,
    substrate: section.substrate,
    nEff,
    excess: mu / (nEff + section.substrate),
    grids: [index(coarse?.mu ?? NaN), index(middle?.mu ?? NaN), index(fine.mu)],
    gridError: error / (2 * nEff),
    order,
    vector: fine.vector,
    ...modeField(fineMatrix, fine, parity, field?.kind === "across"),
  };
}

/**
 * μ at step 0 from steps 4h, 2h, h. The scheme's error runs in even powers of the step (every grid halves the cells of
 * one smooth map, and jumps of the index lie on grid lines), so h² and h⁴ are taken off in turn (Romberg).
 */
export function extrapolated(
  coarse: number | null,
  middle: number | null,
  fine: number,
): { mu: number; error: number } {
  if (middle === null) return { mu: fine, error: Infinity };
  const second = (4 * fine - middle) / 3;
  if (coarse === null) return { mu: second, error: 2 * Math.abs(second - fine) };
  const first = (4 * middle - coarse) / 3;
  return { mu: second + (second - first) / 15, error: 2 * Math.abs(second - first) / 15 };
}

const given = (guess: number | undefined): { guess?: number } => guess === undefined ? {} : { guess };
