import assert from "node:assert/strict";
import {
  designKey,
  designMode,
  designModeCount,
  type DesignTable,
  interpolationError,
  mismatch,
  ModesCutOff,
  solveAreas,
  solveDesign,
  type SolvedMode,
  solverAreaModel,
  type SolverDesign,
  solverIndexModel,
  threeWaveArea,
} from "../../../../models/guides/mod.ts";
import type { Polarisation } from "../../../../shared/vocabulary.ts";
import { assertClose } from "../../../assert_close.ts";

const CELLS = { x: 32, y: 48 };
const GRID = { cells: CELLS, wavelengthNodes: 12 };
const titanium: SolverDesign = {
  material: "CLN",
  axes: { TE: "y", TM: "z" },
  process: { profile: "titanium-diffused", diffusion_lateral_um: 4.5, diffusion_depth_um: 4.5 },
  cover: 1,
  field: "scalar",
  geometry: { width_um: 7, titanium_nm: 100 },
  span: { width_um: 0.75, titanium_nm: 10 },
  lambda: [0.75e-6, 1.65e-6],
  temperatureC: [15, 130],
};
const rubidium: SolverDesign = {
  material: "KTP",
  axes: { TE: "y", TM: "z" },
  process: { profile: "rubidium-exchanged", exchange_depth_um: 8, index_step: { TE: 0.015, TM: 0.016 } },
  cover: 1,
  field: "scalar",
  geometry: { width_um: 3 },
  span: { width_um: 0.5 },
  lambda: [0.75e-6, 1.65e-6],
  temperatureC: [15, 130],
};
const designs = { titanium, rubidium };
const tables = { titanium: solveDesign(titanium, GRID), rubidium: solveDesign(rubidium, GRID) };

type Place = [Polarisation, number, number, number, number];
const PLACES: Place[] = [
  ["TE", 0.787e-6, 130, 0.3, 4],
  ["TM", 0.787e-6, 15, -0.3, -4],
  ["TE", 1.06e-6, 40, 0.4, 0],
  ["TM", 1.31e-6, 130, -0.4, 6],
  ["TE", 1.57e-6, 20, 0, -6],
  ["TM", 1.57e-6, 90, 0.45, 9],
];

function solved(
  design: SolverDesign,
  pol: Polarisation,
  lambda: number,
  T: number,
  geometry = design.geometry,
): SolvedMode {
  const mode = designMode(design, pol, lambda, T, geometry, { cells: CELLS });
  assert.ok(!mode.cutOff);
  return mode;
}
const moved = ({ geometry }: SolverDesign, dw: number, dt: number) =>
  geometry.titanium_nm === undefined
    ? { width_um: geometry.width_um + dw }
    : { width_um: geometry.width_um + dw, titanium_nm: geometry.titanium_nm + dt };

for (const name of ["titanium", "rubidium"] as const) {
  const design = designs[name];
  // What is stored is what is used.
  const model = solverIndexModel(JSON.parse(JSON.stringify(tables[name])) as DesignTable);

  Deno.test(`between its nodes the ${name} table holds the indices that a solution there has`, () => {
    for (const [pol, lambda, T, dw, dt] of PLACES) {
      const geometry = moved(design, dw, dt);
      const what = `${pol} ${lambda} m ${T} °C ${JSON.stringify(geometry)}`;
      const mode = solved(design, pol, lambda, T, geometry);
      assertClose(model.nEff(pol, lambda, T, geometry), mode.nEff, { abs: 2e-6 }, `n_eff, ${what}`);
      const step = 2e-9;
      const slope = (solved(design, pol, lambda + step, T, geometry).nEff -
        solved(design, pol, lambda - step, T, geometry).nEff) / (2 * step);
      const group = model.groupIndex(pol, lambda, T, geometry);
      assertClose(group, mode.nEff - lambda * slope, { abs: 2e-5 }, `group index, ${what}`);
      const slice = model.slice(pol, T, geometry);
      assertClose(slice.n(lambda), model.nEff(pol, lambda, T, geometry), { abs: 1e-15 });
      assertClose(slice.ng(lambda), group, { abs: 1e-15 });
      assertClose(model.overTemperature(pol, lambda, geometry)(T), slice.n(lambda), { abs: 1e-14 });
    }
    assert.ok(interpolationError(tables[name]) < 2e-6);
  });

  Deno.test(`sensitivities of the ${name} table are differences of solved modes`, () => {
    for (const [pol, lambda, T] of PLACES) {
      for (const [parameter, by] of [["width_um", 0.1], ["titanium_nm", 1]] as const) {
        if (design.geometry[parameter] === undefined) {
          assert.equal(model.sensitivity(pol, lambda, T, design.geometry, parameter), 0);
          continue;
        }
        const at = (sign: number) =>
          solved(design, pol, lambda, T, {
            ...design.geometry,
            [parameter]: design.geometry[parameter]! + sign * by,
          }).nEff;
        const expected = (at(1) - at(-1)) / (2 * by);
        const found = model.sensitivity(pol, lambda, T, design.geometry, parameter);
        assertClose(found, expected, { rel: 0.01 }, `${parameter}, ${pol} ${lambda}`);
        assert.ok(found > 0);
      }
    }
  });

  Deno.test(`process sensitivities of the ${name} table are differences of solved modes`, () => {
    const changes = name === "titanium"
      ? [["diffusion_lateral_um", 0.05], ["diffusion_depth_um", 0.05]] as const
      : [["exchange_depth_um", 0.1], ["index_step", 1e-4]] as const;
    for (const [parameter, by] of changes) {
      const changed = (sign: number): SolverDesign => {
        const held = design.process as unknown as Record<string, number | { TE: number; TM: number }>;
        const value = held[parameter]!;
        const next = typeof value === "number"
          ? value + sign * by
          : { TE: value.TE + sign * by, TM: value.TM + sign * by };
        return { ...design, process: { ...held, [parameter]: next } as unknown as SolverDesign["process"] };
      };
      for (const [pol, lambda, T] of PLACES.slice(0, 4)) {
        const at = (sign: number) => solved(changed(sign), pol, lambda, T).nEff;
        const expected = (at(1) - at(-1)) / (2 * by);
        const found = model.processSensitivity(pol, lambda, T, design.geometry, parameter);
        assertClose(found, expected, { rel: 0.02, abs: 5e-7 }, `${parameter}, ${pol} ${lambda}`);
      }
    }
    assert.equal(
      model.processSensitivity(
        "TE",
        1e-6,
        25,
        design.geometry,
        name === "titanium" ? "index_step" : "diffusion_depth_um",
      ),
      0,
    );
  });

  Deno.test(`the ${name} table answers nothing beyond its limits`, () => {
    const { geometry } = design;
    assert.deepEqual(model.range("TE").lambda, [...design.lambda]);
    assert.throws(
      () => model.nEff("TE", 1.7e-6, 25, geometry),
      /found wavelength_nm 1700 for TE, need 750 to 1650/,
    );
    assert.throws(() => model.nEff("TE", 1.5e-6, 140, geometry), /found temperature_c 140, need 15 to 130/);
    assert.throws(() => model.nEff("TE", 1.5e-6, 25, { ...geometry, width_um: 9 }), /found width_um 9, need/);
    assert.throws(() => solverIndexModel({ ...tables[name], version: 0 }), /found version 0, need/);
  });
}

Deno.test("a semi-vectorial table holds the fields across the surface, and leaves those along it alone", () => {
  const design: SolverDesign = { ...rubidium, field: "semi-vectorial", lambda: [1.4e-6, 1.65e-6] };
  const model = solverIndexModel(solveDesign(design, { cells: CELLS, wavelengthNodes: 6 }));
  const scalar = solverIndexModel(tables.rubidium);
  const { geometry } = design;
  for (const T of [15, 130]) {
    const across = model.nEff("TM", 1.55e-6, T, geometry);
    assertClose(across, solved(design, "TM", 1.55e-6, T).nEff, { abs: 2e-6 });
    // Less of the field stands at the surface, and the depth diffracts more by n_z²/n_x²: both lower the index.
    const lowered = scalar.nEff("TM", 1.55e-6, T, geometry) - across;
    assert.ok(lowered > 5e-5 && lowered < 5e-4, `found ${lowered}`);
    assertClose(model.nEff("TE", 1.55e-6, T, geometry), scalar.nEff("TE", 1.55e-6, T, geometry), {
      abs: 1e-6,
    });
  }
});

Deno.test("areas at the process' wavelengths are those of the solved fields", () => {
  const waves = {
    lambdaP: 775e-9,
    lambdaS: 1550e-9,
    lambdaI: 1550e-9,
    polP: "TE",
    polS: "TE",
    polI: "TM",
  } as const;
  const areas = solveAreas(rubidium, waves, GRID);
  const model = solverAreaModel(JSON.parse(JSON.stringify(areas)));
  const geometry = { width_um: 3.2 };
  const [p, s, i] = [
    solved(rubidium, "TE", 775e-9, 72.5, geometry),
    solved(rubidium, "TE", 1550e-9, 72.5, geometry),
    solved(rubidium, "TM", 1550e-9, 72.5, geometry),
  ];
  assertClose(model.effectiveArea("TE>TM+TE", geometry), threeWaveArea(p, s, i), { rel: 1e-4 });
  assert.throws(() => model.effectiveArea("TM>TM+TM", geometry), /solved for TE>TE\+TM/);
  assert.throws(() => model.effectiveArea("TE>TE+TM", { width_um: 5 }), /found width_um 5, need 2.5 to 3.5/);
});

Deno.test("a table ends where its weakest guide stops guiding, and says so", () => {
  const weak: SolverDesign = {
    ...rubidium,
    geometry: { width_um: 1.6 },
    span: { width_um: 0.2 },
    lambda: [0.75e-6, 3e-6],
  };
  const table = solveDesign(weak, { cells: CELLS, wavelengthNodes: 4 });
  const model = solverIndexModel(table);
  const end = model.range("TM").lambda[1];
  assert.ok(end > 0.8e-6 && end < 2.9e-6, `found ${end}`);
  assert.match(
    model.cutOff("TM")!,
    /TM is not safely guided beyond .* nm by a guide of width_um 1.4 \(cut-off\)/,
  );
  assert.throws(() => model.nEff("TM", end + 0.05e-6, 25, weak.geometry), ModesCutOff);
  const none = solveDesign({ ...weak, lambda: [2.9e-6, 3e-6] }, { cells: CELLS, wavelengthNodes: 4 });
  assert.throws(
    () => solverIndexModel(none).nEff("TM", 2.95e-6, 25, weak.geometry),
    /is not guided at 2900 nm/,
  );
});

Deno.test("a type-II mismatch of solved modes lies near that of the crystal", () => {
  const waves = {
    lambdaP: 791e-9,
    lambdaS: 1582e-9,
    lambdaI: 1582e-9,
    polP: "TE",
    polS: "TE",
    polI: "TM",
  } as const;
  const guided = mismatch(solverIndexModel(tables.rubidium), waves, 25, rubidium.geometry);
  assert.ok(guided < 0 && Math.abs(2 * Math.PI / guided) > 50e-6 && Math.abs(2 * Math.PI / guided) < 1000e-6);
});

Deno.test("the number of modes falls with wavelength, and the key changes with every parameter", () => {
  const at = (lambda: number) => designModeCount(titanium, "TM", lambda, 25);
  assert.deepEqual(at(1.6e-6), { even: 1, odd: 0 });
  const short = at(0.8e-6);
  assert.ok(short.even > 2 && short.odd > 1);
  const keys = [
    designKey(titanium),
    designKey(rubidium),
    designKey({ ...titanium, cover: 1.45 }),
    designKey({ ...titanium, geometry: { width_um: 7.1, titanium_nm: 100 } }),
    designKey(titanium, GRID),
  ];
  assert.equal(new Set(keys).size, keys.length);
  const reordered = Object.fromEntries(Object.entries(titanium).reverse()) as unknown as SolverDesign;
  assert.equal(designKey(reordered), keys[0]);
});
