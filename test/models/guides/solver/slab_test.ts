import assert from "node:assert/strict";
import { slabIndex } from "../../../../models/guides/slab.ts";
import { assertClose } from "../../../assert_close.ts";
import { LAMBDA, type PlannedAxis, solvedMu, UNIFORM } from "./plane_modes.ts";

const published = JSON.parse(Deno.readTextFileSync("fixtures/check-values/modes.json"));
const SUBSTRATE = 2.2;

/** Film 0 … thickness on a substrate below (larger y), cover above. */
const layered = (thickness: number, reachUp: number, reachDown: number): PlannedAxis => ({
  segments: [
    { dense: 0, far: -reachUp, cells: 24, scale: 0.5 * thickness },
    { dense: 0, far: thickness, cells: 24, scale: Infinity },
    { dense: thickness, far: thickness + reachDown, cells: 24, scale: thickness },
  ],
  low: "zero",
  high: "zero",
});

// Kogelnik & Ramaswamy, Appl. Opt. 13, 1857 (1974) (from memory); values recomputed.
Deno.test("a guide uniform in x has the slab's normalised index, symmetric or not", () => {
  const contrast = 0.05;
  let worst = 0;
  for (const { a, V, m, b } of published.slab.values) {
    const thickness = V / Math.sqrt(contrast);
    const reach = 14 * thickness / (V * Math.sqrt(b));
    const y = layered(thickness, a === 0 ? reach : 14 * thickness / (V * Math.sqrt(a + b)), reach);
    const mu = solvedMu(
      SUBSTRATE,
      (_, at) => at < 0 ? -a * contrast : at < thickness ? contrast : 0,
      UNIFORM,
      y,
      m,
    );
    assert.ok(mu !== null, `V ${V}, a ${a}, mode ${m} is not guided`);
    worst = Math.max(worst, Math.abs(mu / contrast - b));
    assertClose(mu / contrast, b, { abs: 2e-7 }, `b at V ${V}, a ${a}, mode ${m}`);
  }
  assert.ok(worst > 0);
});

Deno.test("below the first cut-off of an asymmetric slab there is no mode", () => {
  // Cut-off of TE0: V = atan √a; a = 10 → 1.2645.
  const contrast = 0.05;
  const at = (V: number) => {
    const d = V / Math.sqrt(contrast);
    return solvedMu(
      SUBSTRATE,
      (_, y) => y < 0 ? -10 * contrast : y < d ? contrast : 0,
      UNIFORM,
      layered(d, 8 * d, 400 * d),
    );
  };
  assert.equal(at(1.24), null);
  assert.notEqual(at(1.3), null);
});

Deno.test("a field across the layers obeys the closed form of TM slabs", () => {
  for (const { n_core, n_sub, n_cover, d_um, lambda_um, modes } of published.slab_neff) {
    if (n_core > 3) continue; // a high step needs no such grid here
    const unit = 2 * Math.PI / lambda_um; // k0 = 1
    const d = d_um * unit;
    for (const { pol, m, N } of modes) {
      const mu = N * N - n_sub * n_sub;
      const y = layered(d, Math.min(14 / Math.sqrt(N * N - n_cover * n_cover), 40 * d), 14 / Math.sqrt(mu));
      const found = solvedMu(
        n_sub,
        (_, at) => (at < 0 ? n_cover : at < d ? n_core : n_sub) ** 2 - n_sub ** 2,
        UNIFORM,
        y,
        m,
        pol === "TE" ? undefined : { kind: "across", along: n_sub },
      );
      assertClose(
        Math.sqrt(n_sub ** 2 + found!),
        N,
        { abs: 1e-7 },
        `${pol}${m} of ${n_core}/${n_sub}/${n_cover}`,
      );
    }
  }
});

Deno.test("a field along two side walls is a TE wave of the slab that they make, whatever it is across the surface", () => {
  // Uniform in depth: E stands along the walls, so that the closed form of TE holds; that of TM is 1.9e-5 lower.
  const [core, clad, lambda, width] = [1.83, 1.815, 0.8e-6, 3e-6];
  const slab = { core, substrate: clad, cover: clad, thickness: width };
  const [te, tm] = (["TE", "TM"] as const).map((pol) => slabIndex(slab, pol, lambda)!);
  const half = width / 2 * 2 * Math.PI / lambda; // k0 = 1
  const x: PlannedAxis = {
    segments: [
      { dense: 0, far: half, cells: 24, scale: Infinity },
      { dense: half, far: half + 20 / Math.sqrt(te! ** 2 - clad ** 2), cells: 24, scale: half },
    ],
    low: "mirror",
    high: "zero",
  };
  const mu = solvedMu(
    clad,
    (at) => at < half ? core ** 2 - clad ** 2 : 0,
    x,
    UNIFORM,
    0,
    { kind: "across", along: clad },
  );
  const found = Math.sqrt(clad ** 2 + mu!);
  assertClose(found, te!, { abs: 2e-7 });
  assert.ok(te! - tm! > 1e-5, `found ${te! - tm!}`);
});

Deno.test("a crystal's other index scales the depth of a field across the surface", () => {
  // (ε_across/ε_along)·H″ + k0²·(…)H: as an isotropic slab of thickness·√(ε_along/ε_across) between equal claddings.
  const [core, clad, along] = [2.2, 2.19, 2.3];
  const d = 25;
  const scale = along / clad;
  const N = slabIndex({ core, substrate: clad, cover: clad, thickness: d * scale }, "TM", LAMBDA)!;
  const y: PlannedAxis = {
    segments: [
      { dense: 0, far: d, cells: 24, scale: Infinity },
      { dense: d, far: d + 200, cells: 24, scale: d },
    ],
    low: "mirror",
    high: "zero",
  };
  // Half of the slab suffices: mirror in the middle, so the slab is 2·d thick.
  const half = solvedMu(
    clad,
    (_, at) => at < d / 2 ? core ** 2 - clad ** 2 : 0,
    UNIFORM,
    {
      ...y,
      segments: [{ ...y.segments[0]!, far: d / 2 }, { ...y.segments[1]!, dense: d / 2, far: d / 2 + 200 }],
    },
    0,
    { kind: "across", along },
  );
  assertClose(Math.sqrt(clad ** 2 + half!), N, { abs: 1e-7 });
});
