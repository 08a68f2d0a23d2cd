// Pure: no I/O, no clock, no hidden randomness.
// Models of a platform of several solved designs: each question goes to the design whose span holds the guide's width.
import type { GuideGeometry, Polarisation, ThreeWaves } from "../../../shared/vocabulary.ts";
import { type AreaModel, canonicalProcess, processName } from "../area_model.ts";
import type { GeometryParameter, IndexRange } from "../index_model.ts";
import type { DesignGeometry, SolverDesign } from "./design.ts";
import { type DesignAreas, solverAreaModel } from "./design_area.ts";
import type { DesignOutput } from "./design_output.ts";
import type { DesignTable } from "./design_table.ts";
import type { CutOff } from "./solve_guide.ts";
import { type SolverIndexModel, solverIndexModel } from "./solver_index.ts";

/** What one design shows at one wavelength (m): modes, sizes, coupling. */
export interface SolvedOutput {
  readonly design: SolverDesign;
  readonly pol: Polarisation;
  readonly lambda: number;
  readonly result: DesignOutput | CutOff;
}

/** Everything solved for the guides of a platform: plain data. */
export interface SolvedDesigns {
  readonly tables: readonly DesignTable[];
  readonly areas: readonly DesignAreas[];
  readonly outputs: readonly SolvedOutput[];
}

/** Solved at another wavelength than asked by no more than this share: then it is the nearest that counts. */
const AREA_WITHIN = 0.02;
const COUNT_WITHIN = 0.01;

/**
 * The index of several designs of one platform.
 * @throws RangeError without any design, or for tables of another version of the solver
 */
export function designsIndexModel({ tables, outputs }: SolvedDesigns): SolverIndexModel {
  if (tables.length === 0) throw new RangeError("Cannot make an index of solved designs: found none");
  const models = tables.map((table) => ({ design: table.design, model: solverIndexModel(table) }));
  const at = (geometry: GuideGeometry): SolverIndexModel => nearestDesign(models, geometry).model;
  return {
    from: "solver",
    nEff: (pol, lambda, T, geometry) => at(geometry).nEff(pol, lambda, T, geometry),
    groupIndex: (pol, lambda, T, geometry) => at(geometry).groupIndex(pol, lambda, T, geometry),
    slice: (pol, T, geometry) => at(geometry).slice(pol, T, geometry),
    overTemperature: (pol, lambda, geometry) => at(geometry).overTemperature(pol, lambda, geometry),
    sensitivity: (pol, lambda, T, geometry, parameter) =>
      at(geometry).sensitivity(pol, lambda, T, geometry, parameter),
    processSensitivity: (pol, lambda, T, geometry, parameter) =>
      at(geometry).processSensitivity(pol, lambda, T, geometry, parameter),
    range(pol, geometry) {
      if (geometry !== undefined) return at(geometry).range(pol);
      return models.map(({ model }) => model.range(pol)).reduce(common);
    },
    remark(pol, lambda, T, geometry) {
      const { design, model } = nearestDesign(models, geometry ?? models[0]!.design.geometry);
      const several = severalModes(outputs, design, pol, lambda);
      const all = [model.remark(pol, lambda, T), several].filter((r) => r !== null);
      return all.length === 0 ? null : all.join("\n");
    },
    cutOff(pol, geometry, lambda) {
      const { design, model } = nearestDesign(models, geometry ?? models[0]!.design.geometry);
      const why = model.cutOff(pol);
      if (why === null || lambda === undefined) return why;
      const drawn = solvedOutputAt(outputs, design.geometry, pol, lambda);
      return drawn === null || drawn.result.cutOff
        ? why
        : `${why}; a guide as drawn still carries it: its table spans ${
          spanText(design)
        }, a smaller span in the ` +
          "platform file reaches farther";
    },
  };
}

const spanText = ({ span }: { readonly span: DesignGeometry }): string =>
  [
    `± ${span.width_um} µm of width`,
    ...span.titanium_nm === undefined ? [] : [`± ${span.titanium_nm} nm of titanium`],
  ].join(" and ");

/** Effective areas of several designs, each at the wavelengths that it was solved for. */
export function designsAreaModel({ areas }: SolvedDesigns): AreaModel {
  const models = areas.map((solved) => ({ design: solved.design, solved, model: solverAreaModel(solved) }));
  return {
    effectiveArea(process, geometry, waves) {
      const name = canonicalProcess(process);
      const own = models.filter(({ solved }) => nameOf(solved.waves) === name);
      const first = own[0];
      if (first === undefined) throw new RangeError(`Cannot find the effective area of ${name}: not solved`);
      const { design } = nearestDesign(own, geometry);
      const there = own.filter((m) => m.design.geometry.width_um === design.geometry.width_um);
      const asked = waves ?? (there.length === 1 ? there[0]!.solved.waves : null);
      if (asked === null) {
        throw new RangeError(
          `Cannot find the effective area of ${name}: solved at several wavelengths, and none is asked for`,
        );
      }
      const best = there.reduce((a, b) =>
        distance(b.solved.waves, asked) < distance(a.solved.waves, asked) ? b : a
      );
      if (distance(best.solved.waves, asked) > AREA_WITHIN) {
        throw new RangeError(
          `Cannot find the effective area of ${name} at ${wavesText(asked)}: solved at ${
            there.map(({ solved }) => wavesText(solved.waves)).join("; ")
          }`,
        );
      }
      return best.model.effectiveArea(process, geometry);
    },
  };
}

/** What was solved for a guide's design at a wavelength (m), or null. */
export function solvedOutputAt(
  outputs: readonly SolvedOutput[],
  geometry: GuideGeometry,
  pol: Polarisation,
  lambda: number,
): SolvedOutput | null {
  const own = outputs.filter((o) => o.pol === pol && Math.abs(o.lambda / lambda - 1) <= COUNT_WITHIN);
  if (own.length === 0) return null;
  const { design } = nearestDesign(own, geometry);
  return own.filter((o) => o.design.geometry.width_um === design.geometry.width_um)
    .reduce((a, b) => Math.abs(b.lambda - lambda) < Math.abs(a.lambda - lambda) ? b : a);
}

/**
 * Share of power that a fibre takes of the solved field of a guide's design, or null where the mode or this fibre (mode-field
 * diameter, m) was not solved for.
 */
export function solvedCoupling(
  outputs: readonly SolvedOutput[],
  geometry: GuideGeometry,
  pol: Polarisation,
  lambda: number,
  fibreMfd: number,
): number | null {
  const solved = solvedOutputAt(outputs, geometry, pol, lambda);
  if (solved === null || solved.result.cutOff) return null;
  return solved.result.fibres.find(({ mfd }) => Math.abs(mfd / fibreMfd - 1) < 1e-9)?.value ?? null;
}

/** The design whose middle is nearest to the guide's width; its own limits say whether it holds it. */
function nearestDesign<D extends { readonly design: SolverDesign }>(
  designs: readonly D[],
  { width_um }: GuideGeometry,
): D {
  const off = ({ design }: D) => Math.abs(design.geometry.width_um - width_um);
  return designs.reduce((a, b) => off(b) < off(a) ? b : a);
}

function severalModes(
  outputs: readonly SolvedOutput[],
  design: SolverDesign,
  pol: Polarisation,
  lambda: number,
): string | null {
  const found = solvedOutputAt(outputs, design.geometry, pol, lambda);
  if (found === null || found.result.cutOff) return null;
  const { even, odd } = found.result.modes;
  if (even + odd <= 1) return null;
  return `several_modes: a guide drawn ${design.geometry.width_um} µm wide carries ${
    even + odd
  } ${pol} modes at ${shown(lambda * 1e9)} nm; only the fundamental one is computed`;
}

/** Limits within which every design has an answer; widths and other geometry from the least to the most of any. */
function common(a: IndexRange, b: IndexRange): IndexRange {
  const both = (x: [number, number], y: [number, number]): [number, number] => [
    Math.max(x[0], y[0]),
    Math.min(x[1], y[1]),
  ];
  const out: IndexRange = {
    lambda: both(a.lambda, b.lambda),
    temperatureC: both(a.temperatureC, b.temperatureC),
  };
  for (
    const key of ["width_um", "film_thickness_nm", "etch_depth_nm", "titanium_nm"] as GeometryParameter[]
  ) {
    const [x, y] = [a[key], b[key]];
    if (x !== undefined && y !== undefined) out[key] = [Math.min(x[0], y[0]), Math.max(x[1], y[1])];
  }
  return out;
}

const nameOf = (w: ThreeWaves): string => processName(w.polP, w.polS, w.polI);

/** Largest relative difference of the three wavelengths; signal and idler go by their polarisation, or by size. */
function distance(a: ThreeWaves, b: ThreeWaves): number {
  const off = (x: number, y: number) => Math.abs(x / y - 1);
  const pump = off(a.lambdaP, b.lambdaP);
  const straight = Math.max(off(a.lambdaS, b.lambdaS), off(a.lambdaI, b.lambdaI));
  const crossed = Math.max(off(a.lambdaS, b.lambdaI), off(a.lambdaI, b.lambdaS));
  const arms = a.polS === a.polI ? Math.min(straight, crossed) : a.polS === b.polS ? straight : crossed;
  return Math.max(pump, arms);
}

const shown = (x: number): number => Number(x.toFixed(1));
const wavesText = (w: ThreeWaves): string =>
  `${shown(w.lambdaP * 1e9)} + ${shown(w.lambdaS * 1e9)} + ${shown(w.lambdaI * 1e9)} nm`;
