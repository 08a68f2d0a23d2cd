// Guides of the built-in diffused platforms with solved modes, for tests of single numbers.
import { platformDesign, type PlatformModel, platformModel } from "../../../models/decision/mod.ts";
import {
  designsAreaModel,
  designsIndexModel,
  solveAreas,
  type SolvedDesigns,
  solveDesign,
  solveOutput,
} from "../../../models/guides/mod.ts";
import { platformSchema, type SolverIndex } from "../../../shared/schemas/platform.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";

/** n_eff to some 1e-6. */
const GRID = { cells: { x: 32, y: 48 }, wavelengthNodes: 12 };

/** A built-in platform, its index changed, solved for one drawn width (µm) and the waves asked for. */
export function solvedPlatform(
  id: "ti-ln-zcut" | "rb-ktp-zcut",
  width_um: number,
  waves: readonly ThreeWaves[],
  change: Partial<SolverIndex> = {},
): { model: PlatformModel; designs: SolvedDesigns } {
  const platform = platformSchema.parse(JSON.parse(Deno.readTextFileSync(`models/platforms/${id}.json`)));
  if (platform.index.from !== "solver") throw new TypeError(`${id} is not solved`);
  const design = platformDesign(platform, { ...platform.index, ...change } as SolverIndex, width_um);
  const arms = waves.flatMap((w) => [[w.polP, w.lambdaP], [w.polS, w.lambdaS], [w.polI, w.lambdaI]] as const);
  const designs: SolvedDesigns = {
    tables: [solveDesign(design, GRID)],
    areas: waves.map((w) => solveAreas(design, w, GRID)),
    outputs: arms.map(([pol, lambda]) => ({
      design,
      pol,
      lambda,
      result: solveOutput(design, pol, lambda, 25, [], GRID),
    })),
  };
  return { model: platformModel(platform, designsIndexModel(designs), designsAreaModel(designs)), designs };
}

export const doubling = (nm: number, pol: "TE" | "TM"): ThreeWaves => ({
  lambdaP: nm * 0.5e-9,
  lambdaS: nm * 1e-9,
  lambdaI: nm * 1e-9,
  polP: pol,
  polS: pol,
  polI: pol,
});
export const TYPE_TWO: ThreeWaves = { ...doubling(1582, "TE"), polI: "TM" };
