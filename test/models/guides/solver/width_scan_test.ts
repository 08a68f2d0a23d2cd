import assert from "node:assert/strict";
import { designMode, type SolverDesign, solveWidths, widthSlopes } from "../../../../models/guides/mod.ts";
import type { Polarisation, ThreeWaves } from "../../../../shared/vocabulary.ts";
import { assertClose } from "../../../assert_close.ts";

const GRID = { cells: { x: 32, y: 48 }, wavelengthNodes: 4 };
const WAVES: ThreeWaves = {
  lambdaP: 791e-9,
  lambdaS: 1582e-9,
  lambdaI: 1582e-9,
  polP: "TE",
  polS: "TE",
  polI: "TM",
};
const design: SolverDesign = {
  material: "KTP",
  axes: { TE: "y", TM: "z" },
  process: { profile: "rubidium-exchanged", exchange_depth_um: 8, index_step: { TE: 0.015, TM: 0.015 } },
  cover: 1,
  field: "semi-vectorial",
  geometry: { width_um: 3 },
  span: { width_um: 0.5 },
  lambda: [0.75e-6, 1.65e-6],
  temperatureC: [15, 130],
};

/** Δβ of solved modes at one width, less the bulk's. */
function guided(width_um: number): number {
  const part = (pol: Polarisation, lambda: number) => {
    const mode = designMode(design, pol, lambda, 72.5, { width_um }, { cells: GRID.cells });
    if (mode.cutOff) throw new Error(mode.reason);
    return 2 * Math.PI / lambda * mode.excess;
  };
  return part("TE", 791e-9) - part("TE", 1582e-9) - part("TM", 1582e-9);
}

Deno.test("a scan's slope and curvature over the width are differences of solved modes, far from the drawn width", () => {
  const scan = solveWidths(design, WAVES, [1.9, 6], GRID);
  assert.equal(scan.cutOff, null);
  const { slope, curvature } = widthSlopes(JSON.parse(JSON.stringify(scan)));
  const h = 0.05;
  for (const w of [2.2, 3, 4.1, 5.3]) {
    const [low, middle, high] = [guided(w - h), guided(w), guided(w + h)];
    assertClose(slope(w), (high - low) / (2 * h), { abs: 40 }, `slope at ${w} µm`);
    assertClose(curvature(w), (high - 2 * middle + low) / h ** 2, { abs: 300 }, `curvature at ${w} µm`);
  }
  // The turning point is real: Δβ is highest between 2.9 and 3.2 µm.
  assert.ok(slope(2.9) > 0 && slope(3.2) < 0 && guided(3.04) > guided(2.8) && guided(3.04) > guided(3.3));
});

Deno.test("a scan starts where the weakest wave is guided safely, and says which is lost below", () => {
  const { widths_um: [from, to], cutOff, guided } = solveWidths(design, WAVES, [1.2, 3], GRID);
  assert.ok(from > 1.7 && from < 1.9 && to === 3, `found ${from}`);
  assert.match(cutOff!, /^TM is not safely guided at 1582 nm by widths below 1\.\d+ µm \(cut-off\)$/);
  assert.ok(guided.every(Number.isFinite));
  const none = solveWidths(design, WAVES, [0.8, 1.2], GRID);
  assert.deepEqual(none.guided, []);
  assert.match(none.cutOff!, /is not safely guided at 1582 nm by widths below 1\.2 µm/);
});

Deno.test("signal and idler of one kind count twice", () => {
  const same: ThreeWaves = { ...WAVES, polI: "TE" };
  const nearly: ThreeWaves = { ...same, lambdaI: WAVES.lambdaI * (1 + 1e-9) };
  const [a, b] = [same, nearly].map((w) => solveWidths(design, w, [2.5, 3.5], GRID).guided);
  a!.forEach((value, k) => assertClose(value, b![k]!, { rel: 1e-5 }));
});
