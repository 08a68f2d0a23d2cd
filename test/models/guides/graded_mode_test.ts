import assert from "node:assert/strict";
import { gradedIndex, gradedMode, type GradedProfile } from "../../../models/guides/graded_mode.ts";
import { slabIndex } from "../../../models/guides/slab.ts";
import { assertClose } from "../../assert_close.ts";

const modes = JSON.parse(Deno.readTextFileSync("fixtures/check-values/modes.json"));
const lambda = 1e-6;
const k0 = 2 * Math.PI / lambda;

/** b = (N² − substrate²)/contrast of an even-mode or surface problem in normalised form. */
const sech = (V: number, substrate = 2): GradedProfile => {
  const h = 1e-6;
  const contrast = (V / (k0 * h)) ** 2;
  return {
    substrate,
    contrast: (x) => contrast / Math.cosh(x / h) ** 2,
    left: { kind: "symmetry" },
    extent: 25e-6,
    points: 2000,
  };
};

// Pöschl–Teller closed form b = ((s − m)/V)², s = (√(1+4V²) − 1)/2.
Deno.test("the even modes of a sech² profile follow the closed form", () => {
  let seen = 0;
  for (const { V, b } of modes.sech2_profile.values) {
    for (let m = 0; m < b.length; m += 2) {
      if (b[m] < 0.02) continue; // its tail outgrows the window
      const N = gradedIndex(sech(V), lambda, m / 2)!;
      const contrast = (V / (k0 * 1e-6)) ** 2;
      assertClose((N * N - 4) / contrast, b[m], { abs: 1e-7 }, `V ${V}, m ${m}`);
      seen++;
    }
  }
  assert.equal(seen, 6);
});

// Conwell (1973), from memory; recomputed.
Deno.test("an exponential profile under air has the published modes", () => {
  const { lambda_um, ns, d_um, nc, modes: expected } = modes.exponential_profile.example_air;
  const profile: GradedProfile = {
    substrate: ns,
    contrast: (x) => 2 * ns * 0.01 * Math.exp(-x / (d_um * 1e-6)),
    left: { kind: "cover", index: nc },
    extent: 60e-6,
    points: 6000,
  };
  for (const { m, N } of expected.slice(0, 3)) {
    assertClose(gradedIndex(profile, lambda_um * 1e-6, m)!, N, { abs: 1e-8 }, `mode ${m}`);
  }
});

Deno.test("refining the grid fourfold changes an index by less than 1e-8: the extrapolation has converged", () => {
  const N = [250, 500, 1000].map((points) => gradedIndex({ ...sech(3), points }, lambda)!);
  const steps = [Math.abs(N[1]! - N[0]!), Math.abs(N[2]! - N[1]!)];
  assert.ok(steps[1]! < 1e-8);
  assert.ok(steps[0]! / steps[1]! > 10, `fourth order, found a ratio of ${steps[0]! / steps[1]!}`);
});

Deno.test("a step profile under a cover agrees with the exact slab", () => {
  const [substrate, core, cover, thickness] = [2.14, 2.2, 1, 2e-6];
  const points = 800;
  const extent = 16e-6;
  const exact = slabIndex({ core, substrate, cover, thickness }, "TE", 1.55e-6)!;
  // The step lies midway between nodes of both grids only approximately: first-order accuracy is left.
  const N = gradedIndex({
    substrate,
    contrast: (x) => x < thickness ? core ** 2 - substrate ** 2 : 0,
    left: { kind: "cover", index: cover },
    extent,
    points,
  }, 1.55e-6)!;
  assertClose(N, exact, { abs: 3e-4 });
});

Deno.test("the field is that of the closed form: sech^s", () => {
  const V = 3;
  const { field, step, index } = gradedMode(sech(V), lambda)!;
  assert.equal(index, gradedIndex(sech(V), lambda));
  const s = (Math.sqrt(1 + 4 * V * V) - 1) / 2;
  for (const j of [0, 1, 40, 80, 160, 320]) {
    assertClose(field[j]!, 1 / Math.cosh(j * step / 1e-6) ** s, { abs: 1e-4 }, `node ${j}`);
  }
});

Deno.test("a profile too weak to guide under a cover is null", () => {
  // Below V = 1.2024, half the first zero of J0 (Conwell 1973), an exponential profile with zero field at the surface.
  const profile = (V: number): GradedProfile => ({
    substrate: 2.2,
    contrast: (x) => (V / (k0 * 1e-6)) ** 2 * Math.exp(-x / 1e-6),
    left: { kind: "cover", index: 1 },
    extent: 80e-6,
    points: 4000,
  });
  assert.equal(gradedMode(profile(1.0), lambda), null);
  assert.notEqual(gradedMode(profile(1.5), lambda), null);
});
