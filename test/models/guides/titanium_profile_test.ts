import assert from "node:assert/strict";
import {
  surfaceConcentration,
  titaniumStepExtraordinary,
  titaniumStepOrdinary,
} from "../../../models/guides/titanium_profile.ts";
import { depthModeContrast, effectiveIndex, separableMode } from "../../../models/guides/effective_index.ts";
import { refractiveIndex } from "../../../models/materials/mod.ts";
import { assertClose } from "../../assert_close.ts";

const { ti_indiffused_LN: published } = JSON.parse(Deno.readTextFileSync("fixtures/check-values/modes.json"));
const stripe = { width: 7e-6, titanium: 0.1e-6, lateral: 4.5e-6, depth: 4.5e-6 };

// Strake, Bava & Montrosset (1988), formulas from memory; recomputed.
Deno.test("index increases of titanium are the published ones", () => {
  for (const row of published.table) {
    const lambda = row.lambda_um * 1e-6;
    assertClose(titaniumStepExtraordinary(1e21, lambda), row.dn_e_c1e21, { abs: 1e-8 });
    assertClose(titaniumStepExtraordinary(5e20, lambda), row.dn_e_c5e20, { abs: 1e-8 });
    assertClose(titaniumStepOrdinary(1e21, lambda), row.dn_o_c1e21, { abs: 1e-8 });
    assertClose(titaniumStepOrdinary(5e20, lambda), row.dn_o_c5e20, { abs: 1e-8 });
  }
});

// "Precise determination of refractive-index changes in Ti-diffused LiNbO3 optical waveguides", J. Appl. Phys. 49, 4677
// (1978), abstract: 1.05e-2 (extraordinary) and 7.7e-3 (ordinary) at the surface of one guide; 632.8 nm from memory.
// Published laws scatter: exponents of 0.4 and 1.07 in near-stoichiometric crystal (Mater. Res. Bull. 60, 771 (2014))
// beside 0.55 and 1 here.
Deno.test("both increases measured on one guide belong to one concentration within the law's 15 %", () => {
  const lambda = 632.8e-9;
  const concentration = 1e21 * 1.05e-2 / titaniumStepExtraordinary(1e21, lambda);
  assert.ok(concentration > 5e20 && concentration < 1.6e21, `found ${concentration}`);
  assertClose(titaniumStepOrdinary(concentration, lambda), 7.7e-3, { rel: 0.15 });
});

Deno.test("all titanium of the strip is found in the crystal", () => {
  assertClose(surfaceConcentration(stripe, 0) / 1e20, published.dose_check.c_surface_W7_tau0p1_D4p5, {
    rel: 1e-6,
  });
  // ∫∫ c dx dy = density × thickness × width: gaussian depth gives √π/2·D_y.
  let sum = 0;
  const step = 0.05e-6;
  for (let x = -40e-6; x <= 40e-6; x += step) sum += surfaceConcentration(stripe, x) * step;
  assertClose(sum * Math.sqrt(Math.PI) / 2 * 4.5e-6, 5.67e22 * 0.1e-6 * 7e-6, { rel: 1e-6 });
});

Deno.test("the effective-index route over-estimates the solved titanium guide by the stated amount", () => {
  // Two-dimensional benchmark (two independent methods agreeing to 1e-8): N − n_s = 0.0025454.
  const { mode_benchmark: benchmark } = published;
  const lambda = benchmark.lambda_um * 1e-6;
  const ns = refractiveIndex("CLN", "e", lambda, 25);
  assertClose(ns, benchmark.ns, { abs: 1e-8 });
  const guide = {
    substrate: ns,
    cover: 1,
    depthContrast: (c: number, y: number) =>
      (ns + titaniumStepExtraordinary(c * Math.exp(-((y / stripe.depth) ** 2)), lambda)) ** 2 - ns ** 2,
    strength: (x: number) => surfaceConcentration(stripe, x),
    depthExtent: 50e-6,
    lateralExtent: 50e-6,
    points: 500,
  };
  const contrast = depthModeContrast(guide, lambda, guide.strength(0));
  const over = effectiveIndex(guide, lambda, contrast)! - benchmark.N;
  // 3.2e-5 too high: 1.3 % of n_eff − n_substrate.
  assert.ok(over > 2.5e-5 && over < 4e-5, `found ${over}`);
  const mode = separableMode(guide, lambda, contrast)!;
  assertClose(mode.index - benchmark.N, over, { abs: 1e-12 });
  const widths = { lateral: 0, depth: 0 };
  for (const side of ["lateral", "depth"] as const) {
    const { field, step } = mode[side];
    const above = field.filter((e) => e * e >= 0.5).length * step;
    widths[side] = 1e6 * (side === "lateral" ? 2 * above : above);
  }
  assertClose(widths.lateral, benchmark.fwhm_intensity_um.lateral, { rel: 0.07 });
  assertClose(widths.depth, benchmark.fwhm_intensity_um.depth, { rel: 0.04 });
});
