import { deepEqual, equal, ok, throws } from "node:assert/strict";
import {
  changedDesigns,
  nudgeEffects,
  parameterSlope,
  platformDesign,
  type PlatformModel,
  platformModel,
} from "../../../models/decision/mod.ts";
import {
  designMode,
  designsAreaModel,
  designsIndexModel,
  mismatch,
  solveAreas,
  solveDesign,
} from "../../../models/guides/mod.ts";
import { platformSchema, type SolverIndex } from "../../../shared/schemas/platform.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";
import { doubling, solvedPlatform, TYPE_TWO } from "./solved_guide.ts";

const GRID = { cells: { x: 32, y: 48 }, wavelengthNodes: 12 };
const load = (id: string) =>
  platformSchema.parse(JSON.parse(Deno.readTextFileSync(`models/platforms/${id}.json`)));

function changedModels(id: "ti-ln-zcut" | "rb-ktp-zcut", width: number, waves: ThreeWaves) {
  const platform = load(id);
  const index = platform.index as SolverIndex;
  const drawn = platformDesign(platform, index, width);
  return changedDesigns(drawn, index).map(({ parameter, by, design }) => {
    const solved = {
      tables: [solveDesign(design, GRID)],
      areas: [solveAreas(design, waves, GRID)],
      outputs: [],
    };
    const model: PlatformModel = platformModel(platform, designsIndexModel(solved), designsAreaModel(solved));
    return { parameter, by, design, model };
  });
}

const DOUBLING = doubling(1550, "TM");
const titanium = solvedPlatform("ti-ln-zcut", 7, [DOUBLING]).model;
const changedTitanium = changedModels("ti-ln-zcut", 7, DOUBLING);
const POINT = {
  waves: DOUBLING,
  process: "second-harmonic" as const,
  geometry: { width_um: 7, titanium_nm: 100 },
  temperatureC: 72.5,
};
const effects = nudgeEffects(titanium, POINT, changedTitanium);
const effectOf = (parameter: string) => effects.find((e) => e.parameter === parameter)!;

Deno.test("a process error changes the mismatch as modes do that are solved with it, and to first order as the table says", () => {
  for (const parameter of ["diffusion_lateral_um", "diffusion_depth_um"] as const) {
    const { by, deltaBeta } = effectOf(parameter);
    equal(by, 0.1);
    const design = changedTitanium.find((c) => c.parameter === parameter && c.by === by)!.design;
    const drawn = { ...design, process: { ...design.process, [parameter]: 4.5 } };
    const per = ({ pol, lambda, sign }: { pol: "TE" | "TM"; lambda: number; sign: number }) => {
      const [after, before] = [design, drawn].map((d) =>
        designMode(d, pol, lambda, 72.5, d.geometry, { cells: { x: 64, y: 100 } })
      );
      if (after!.cutOff || before!.cutOff) throw new Error("cut off");
      return sign * 2 * Math.PI / lambda * (after!.excess - before!.excess);
    };
    const solved = per({ pol: "TM", lambda: DOUBLING.lambdaP, sign: 1 }) +
      per({ pol: "TM", lambda: DOUBLING.lambdaS, sign: -2 });
    assertClose(deltaBeta, solved, { rel: 0.01 }, parameter);
    assertClose(deltaBeta, by * parameterSlope(titanium, POINT, parameter), { rel: 0.05 }, parameter);
  }
});

Deno.test("time and temperature of diffusion act through both lengths", () => {
  for (
    const [parameter, lengthens] of [["diffusion_hours", 0.5 / 8.5], [
      "diffusion_temperature_c",
      null,
    ]] as const
  ) {
    const { by, deltaBeta, efficiency } = effectOf(parameter);
    const { process } = changedTitanium.find((c) => c.parameter === parameter && c.by === by)!.design;
    if (process.profile !== "titanium-diffused") throw new Error(process.profile);
    const by_um = process.diffusion_depth_um - 4.5;
    assertClose(process.diffusion_lateral_um - 4.5, by_um, { abs: 1e-12 });
    // Lengths go with the square root of the time; with the temperature as the activation energy says, 2.15 eV.
    const share = lengthens ?? 25000 / (2 * 1333.15 ** 2);
    assertClose(by_um, 4.5 * share * by, { rel: 0.01 }, parameter);
    const both = (["diffusion_lateral_um", "diffusion_depth_um"] as const).reduce(
      (sum, length) => sum + by_um * parameterSlope(titanium, POINT, length),
      0,
    );
    assertClose(deltaBeta, both, { rel: 0.03 }, parameter);
    // A wider mode of the same power converts less.
    ok(efficiency! < 0 && efficiency! > -0.05, `${parameter}: ${efficiency}`);
  }
});

Deno.test("efficiency follows indices and area of the changed guide", () => {
  for (const { parameter, by, model } of changedTitanium.filter((c) => c.by > 0)) {
    const n = (m: PlatformModel, lambda: number) => m.index.nEff("TM", lambda, 72.5, POINT.geometry);
    const strength = (m: PlatformModel) =>
      1 / (n(m, DOUBLING.lambdaP) * n(m, DOUBLING.lambdaS) ** 2 *
        m.area.effectiveArea("TM>TM+TM", POINT.geometry, DOUBLING));
    const effect = effects.find((e) => e.parameter === parameter && e.by === by)!;
    assertClose(effect.efficiency!, strength(model) / strength(titanium) - 1, { abs: 1e-12 }, parameter);
  }
});

Deno.test("a changed design knows the drawn geometry alone, and a process has only its own parameters", () => {
  const { model } = changedTitanium[0]!;
  ok(mismatch(model.index, DOUBLING, 72.5, POINT.geometry) > 0);
  throws(() => mismatch(model.index, DOUBLING, 72.5, { ...POINT.geometry, width_um: 7.1 }), /need 7 /);
  const named = (id: string, change = {}) => {
    const platform = load(id);
    const index = { ...platform.index, ...change } as SolverIndex;
    return [...new Set(changedDesigns(platformDesign(platform, index, 3), index).map((c) => c.parameter))];
  };
  deepEqual(named("ti-ln-zcut").length, 4);
  deepEqual(named("ti-ln-zcut", { diffusion: undefined }), ["diffusion_lateral_um", "diffusion_depth_um"]);
  deepEqual(named("rb-ktp-zcut"), ["exchange_depth_um", "index_step"]);
});

Deno.test("where the exchange depth hardly counts both signs are told, and they are those of solved modes", () => {
  const { model } = solvedPlatform("rb-ktp-zcut", 3, [TYPE_TWO]);
  const point = { ...POINT, waves: TYPE_TWO, geometry: { width_um: 3 } };
  const depth = nudgeEffects(model, point, changedModels("rb-ktp-zcut", 3, TYPE_TWO))
    .filter((e) => e.parameter === "exchange_depth_um");
  // On 160 × 240 cells: −4.481 and +1.481 1/m for ±0.1 µm; here the grid is coarse.
  equal(depth.map((e) => e.by).join(), "0.1,-0.1");
  assertClose(depth[0]!.deltaBeta, -4.481, { abs: 0.2 });
  assertClose(depth[1]!.deltaBeta, 1.481, { abs: 0.2 });
  ok(depth[0]!.efficiency! > 0.005 && depth[1]!.efficiency! < -0.005);
});
