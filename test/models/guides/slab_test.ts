import assert from "node:assert/strict";
import { slabField, slabIndex } from "../../../models/guides/slab.ts";
import { assertClose } from "../../assert_close.ts";

const modes = JSON.parse(Deno.readTextFileSync("fixtures/check-values/modes.json"));

// Kogelnik & Ramaswamy (1974), formula from memory; values recomputed.
Deno.test("normalised slab modes are the published ones", () => {
  for (const { a, V, m, b } of modes.slab.values) {
    const [core, substrate] = [2.2, 2.15];
    const cover = Math.sqrt(substrate ** 2 - a * (core ** 2 - substrate ** 2));
    const lambda = 1e-6;
    const thickness = V * lambda / (2 * Math.PI * Math.sqrt(core ** 2 - substrate ** 2));
    const N = slabIndex({ core, substrate, cover, thickness }, "TE", lambda, m)!;
    assertClose(
      (N * N - substrate ** 2) / (core ** 2 - substrate ** 2),
      b,
      { abs: 2e-8 },
      `a ${a}, V ${V}, m ${m}`,
    );
  }
});

Deno.test("effective indices of three slabs are the recomputed ones, TE and TM", () => {
  for (const slab of modes.slab_neff) {
    const { n_core: core, n_sub: substrate, n_cover: cover, d_um, lambda_um } = slab;
    for (const { pol, m, N } of slab.modes) {
      const found = slabIndex({ core, substrate, cover, thickness: d_um * 1e-6 }, pol, lambda_um * 1e-6, m)!;
      assertClose(found, N, { abs: 2e-9 }, `${d_um} µm ${pol}${m}`);
    }
  }
});

Deno.test("a mode below its cut-off is null", () => {
  const slab = { core: 2.2, substrate: 2.19, cover: 1, thickness: 0.5e-6 };
  assert.equal(slabIndex(slab, "TE", 1.55e-6), null);
  assert.equal(slabIndex({ ...slab, thickness: 4e-6 }, "TE", 1.55e-6, 5), null);
});

Deno.test("a slab without a guiding core is refused", () => {
  const slab = { core: 2.1, substrate: 2.2, cover: 1, thickness: 1e-6 };
  assert.throws(() => slabIndex(slab, "TE", 1.55e-6), /RangeError.*core of the highest index/);
  assert.throws(() => slabIndex({ ...slab, core: 2.3, thickness: 0 }, "TE", 1.55e-6), RangeError);
});

Deno.test("the field solves the wave equation inside and joins smoothly at both faces", () => {
  const slab = { core: 2.2, substrate: 2.14, cover: 1, thickness: 2e-6 };
  const lambda = 1.55e-6;
  const h = 1e-10;
  for (const pol of ["TE", "TM"] as const) {
    const N = slabIndex(slab, pol, lambda)!;
    const field = slabField(slab, pol, lambda, N);
    const curvature = (field(1e-6 + 100 * h) - 2 * field(1e-6) + field(1e-6 - 100 * h)) / (100 * h) ** 2;
    const k0 = 2 * Math.PI / lambda;
    assertClose(curvature / field(1e-6), k0 * k0 * (N * N - 2.2 ** 2), { rel: 1e-4 }, pol);
    for (const [face, outside, side] of [[0, 2.14, -1], [2e-6, 1, 1]] as const) {
      assertClose(field(face + side * h), field(face - side * h), { rel: 1e-2 }, `${pol} value at ${face}`);
      const weight = pol === "TE" ? 1 : (2.2 / outside) ** 2; // H′/n² is continuous in TM
      const out = (field(face + 2 * side * h) - field(face + side * h)) * weight;
      const into = field(face - side * h) - field(face - 2 * side * h);
      assertClose(out, into, { rel: 5e-3 }, `${pol} slope at ${face}`);
    }
  }
});
