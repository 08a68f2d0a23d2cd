import assert from "node:assert/strict";
import { assertClose } from "../../../assert_close.ts";
import { type PlannedAxis, solvedMu } from "./plane_modes.ts";

const published = JSON.parse(Deno.readTextFileSync("fixtures/check-values/modes.json"));
const CLAD = 1.45;

/** Half of an axis: a core with an edge, and outside. */
const half = (
  edge: number,
  reach: number,
  cells: number,
  low: "mirror" | "zero" = "mirror",
): PlannedAxis => ({
  segments: [
    { dense: edge, far: 0, cells, scale: edge / 3 },
    { dense: edge, far: edge + reach, cells, scale: edge / 2 },
  ],
  low,
  high: "zero",
});

/** B of a rectangle of V (over its height) and aspect ratio, on a quarter of it. */
function rectangleB(V: number, aspect: number, expected: number, cells: number): number {
  const contrast = 0.02;
  const height = V / Math.sqrt(contrast);
  const width = aspect * height;
  const reach = 12 / Math.sqrt(expected * contrast);
  const mu = solvedMu(
    CLAD,
    (x, y) => x < width / 2 && y < height / 2 ? contrast : 0,
    half(width / 2, reach, cells),
    half(height / 2, reach, cells),
  );
  return mu! / contrast;
}

// Goell's problem (Bell Syst. Tech. J. 48, 2133 (1969), curves); scalar values recomputed with spectral elements.
Deno.test("a rectangular core has the published normalised index", () => {
  const { square, aspect2 } = published.rectangular_scalar;
  const all = [
    ...square.map((row: { V: number; B: number }) => [1, row.V, row.B]),
    ...aspect2.map((row: { V: number; B: number }) => [2, row.V, row.B]),
  ] as [number, number, number][];
  assert.equal(all.length, 8);
  for (const [aspect, V, B] of all) {
    assertClose(rectangleB(V, aspect, B, 4), B, { abs: 2e-5 }, `practical grid, ${aspect}:1, V ${V}`);
    assertClose(rectangleB(V, aspect, B, 8), B, { abs: 1e-6 }, `refined grid, ${aspect}:1, V ${V}`);
  }
});

// Gloge, Appl. Opt. 10, 2252 (1971) (from memory); recomputed. A round edge lies across the cells:
// it is ramped over half a cell of the coarsest grid, and 5e-4 in b is what is reached (2e-7 on a straight edge).
Deno.test("a round core has the fibre's normalised index", () => {
  const contrast = 0.01;
  const rows = published.fibre_LP.values.filter((row: { V: number }) => row.V >= 1.5);
  assert.equal(rows.length, 7);
  for (const { V, LP01, LP11, LP02 } of rows) {
    assertClose(roundB(V, LP01, 0, contrast), LP01, { abs: 5e-4 }, `LP01 at V ${V}`);
    if (LP11 !== null) {
      assertClose(roundB(V, LP11, 0, contrast, "zero"), LP11, { abs: 5e-4 }, `LP11 at V ${V}`);
    }
    // Of the modes that are even both ways LP21 comes second and LP02 third.
    if (LP02 > 0.1) assertClose(roundB(V, LP02, 2, contrast), LP02, { abs: 1e-3 }, `LP02 at V ${V}`);
  }
});

function roundB(
  V: number,
  expected: number,
  order: number,
  contrast: number,
  low: "mirror" | "zero" = "mirror",
): number {
  const radius = V / Math.sqrt(contrast);
  const reach = 10 / Math.sqrt(expected * contrast);
  const cells = 12;
  const axis = (end: "mirror" | "zero"): PlannedAxis => ({
    segments: [
      { dense: 0, far: 1.25 * radius, cells, scale: Infinity },
      { dense: 1.25 * radius, far: 1.25 * radius + reach, cells: 8, scale: radius / 2 },
    ],
    low: end,
    high: "zero",
  });
  const ramp = 1.25 * radius / cells / 2;
  const mu = solvedMu(
    CLAD,
    (x, y) => contrast * Math.min(1, Math.max(0, 0.5 - (Math.hypot(x, y) - radius) / ramp)),
    axis(low),
    axis("mirror"),
    order,
  );
  return mu! / contrast;
}
