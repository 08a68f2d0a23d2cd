import assert from "node:assert/strict";
import { refractiveIndex } from "../../../../models/materials/mod.ts";
import { surfaceConcentration } from "../../../../models/guides/titanium_profile.ts";
import {
  countModes,
  type CutOff,
  diffusionRemarks,
  fibreCoupling,
  modeShape,
  type SolvedMode,
  solveGuide,
  type SolveOptions,
  threeWaveArea,
  titaniumDiffusionLength,
  titaniumRemarks,
  titaniumSection,
} from "../../../../models/guides/mod.ts";
import { areaWeights } from "../../../../models/guides/solver/axis.ts";
import { fieldAt } from "../../../../models/guides/solver/resample.ts";
import { assertClose } from "../../../assert_close.ts";

const { ti_indiffused_LN } = JSON.parse(Deno.readTextFileSync("fixtures/check-values/modes.json"));
const benchmark = ti_indiffused_LN.mode_benchmark;
const stripe = { width: 7e-6, titanium: 0.1e-6, lateral: 4.5e-6, depth: 4.5e-6 };
const PRACTICAL = { x: 32, y: 48 };

function solve(
  wave: "ordinary" | "extraordinary",
  lambda: number,
  options: SolveOptions = {},
  guide = stripe,
): SolvedMode | CutOff {
  const ns = refractiveIndex("CLN", wave === "extraordinary" ? "e" : "o", lambda, 25);
  return solveGuide(titaniumSection(guide, wave, lambda, ns), lambda, options);
}
function need(mode: SolvedMode | CutOff): SolvedMode {
  assert.ok(!mode.cutOff, mode.cutOff ? mode.reason : "");
  return mode;
}

// Benchmark of two independent methods that agree to 1e-8 (scalar; Strake et al. (1988) profile, from memory).
Deno.test("the titanium benchmark is met on a refined and on a practical grid", () => {
  const lambda = benchmark.lambda_um * 1e-6;
  const refined = need(solve("extraordinary", lambda));
  assertClose(refined.nEff, benchmark.N, { abs: 5e-8 }, "N, refined");
  assertClose(refined.excess, benchmark.N_minus_ns, { abs: 1e-7 }, "N − n_s");
  assert.ok(refined.gridError < 1.2e-7 && Math.abs(refined.grids[2] - refined.nEff) < 1e-6);
  const practical = need(solve("extraordinary", lambda, { cells: PRACTICAL }));
  assertClose(practical.nEff, benchmark.N, { abs: 5e-6 }, "N, practical");
  for (const mode of [refined, practical]) {
    assert.ok(Math.abs(mode.nEff - benchmark.N) < mode.gridError + 1e-8);
  }
  for (const [mode, tolerance] of [[refined, 0.01], [practical, 0.03]] as const) {
    const shape = modeShape(mode);
    assertClose(shape.fwhmX * 1e6, benchmark.fwhm_intensity_um.lateral, { rel: tolerance }, "lateral");
    assertClose(shape.fwhmY * 1e6, benchmark.fwhm_intensity_um.depth, { rel: tolerance }, "depth");
    assertClose(shape.peakY * 1e6, benchmark.fwhm_intensity_um.peak_depth, { rel: tolerance }, "maximum");
    assert.equal(shape.peakX, 0);
    assert.ok(shape.mfdX > shape.fwhmX && shape.mfdY > shape.fwhmY);
  }
});

Deno.test("the benchmark guide carries one even mode and an odd one at the edge of cut-off", () => {
  const lambda = benchmark.lambda_um * 1e-6;
  const section = titaniumSection(stripe, "extraordinary", lambda, refractiveIndex("CLN", "e", lambda, 25));
  assert.deepEqual(countModes(section, lambda), { even: benchmark.symmetric_modes, odd: 1 });
  const odd = need(solve("extraordinary", lambda, { parity: "odd" }));
  assertClose(odd.excess, benchmark.first_antisymmetric_N_minus_ns, { abs: 2e-6 });
  assert.equal(fieldAt(odd, -3e-6, 3e-6), -fieldAt(odd, 3e-6, 3e-6));
  assert.ok(modeShape(odd).peakX > 2e-6);
});

Deno.test("a mode that is not guided is a result with its reason", () => {
  const lambda = 1.55e-6;
  for (
    const mode of [
      solve("extraordinary", lambda, { order: 1, cells: PRACTICAL }),
      solve("extraordinary", lambda, { cells: PRACTICAL }, { ...stripe, titanium: 0.02e-6 }),
    ]
  ) {
    assert.ok(mode.cutOff);
    assert.match(mode.reason, /no guided even mode of order [01] at 1550 nm \(cut-off\)/);
  }
});

// Full widths at half intensity near 1550 nm of guides from strips of 6 to 8 µm, about 100 nm thick: published ones run
// from 4.5 × 3 to 5.5 × 4 µm for the extraordinary wave and from 6 × 4 to 7.5 × 5.5 µm for the ordinary one, with
// diffusion and supplier (from memory; S. K. Korotky et al., IEEE J. Quantum Electron. 18, 1796 (1982) has the trends).
Deno.test("mode sizes near 1550 nm lie among the published ones for strips of 6 to 8 µm, the ordinary wave the larger", () => {
  for (const width of [6e-6, 7e-6, 8e-6]) {
    const shape = (wave: "ordinary" | "extraordinary") =>
      modeShape(need(solve(wave, 1.55e-6, { cells: PRACTICAL }, { ...stripe, width })));
    const within = (value: number, low: number, high: number) =>
      assert.ok(value > low * 1e-6 && value < high * 1e-6, `found ${value}, need ${low} to ${high} µm`);
    const e = shape("extraordinary");
    within(e.fwhmX, 4.5, 5.5);
    within(e.fwhmY, 3, 4);
    const o = shape("ordinary");
    within(o.fwhmX, 6, 7.5);
    within(o.fwhmY, 4, 5.5);
  }
});

// Opt. Mater. Express 5, 1715 (2015), abstract: 8 µm wide, 100 nm thick strips on z-cut congruent crystal (zirconium in
// it) guide TE and TM, and one mode alone at 1.5 µm.
Deno.test("a strip of 8 µm guides both polarisations at 1550 nm, and no second mode but one about to be cut off", () => {
  const wide = { ...stripe, width: 8e-6 };
  for (const wave of ["ordinary", "extraordinary"] as const) {
    const first = need(solve(wave, 1.55e-6, { cells: PRACTICAL }, wide));
    assert.ok(solve(wave, 1.55e-6, { cells: PRACTICAL, order: 1 }, wide).cutOff);
    const odd = solve(wave, 1.55e-6, { cells: PRACTICAL, parity: "odd" }, wide);
    assert.ok(
      odd.cutOff || odd.excess < 0.15 * first.excess,
      odd.cutOff ? "" : `${odd.excess / first.excess}`,
    );
  }
});

Deno.test("fields are normalised and a higher mode is orthogonal to the fundamental", () => {
  const lambda = 0.9e-6;
  const modes = [0, 1].map((order) =>
    need(solve("extraordinary", lambda, { order, cells: { x: 64, y: 100 } }))
  );
  const areas = areaWeights({ nodes: modes[0]!.x }, { nodes: modes[0]!.y });
  const norm = modes[0]!.field.reduce((sum, e, k) => sum + 2 * areas[k]! * e * e, 0);
  assertClose(norm, 1, { abs: 1e-12 });
  // ∫∫ e_0² e_1 need not vanish, but an odd mode's share does.
  const odd = need(solve("extraordinary", lambda, { parity: "odd", cells: { x: 64, y: 100 } }));
  assert.equal(threeWaveArea(odd, modes[0]!, modes[0]!), Infinity);
  assert.ok(Number.isFinite(threeWaveArea(odd, odd, modes[0]!)));
  const self = threeWaveArea(modes[0]!, modes[0]!, modes[0]!);
  assert.ok(threeWaveArea(modes[1]!, modes[0]!, modes[0]!) > 2 * self);
});

Deno.test("the coupling of a Gaussian-like mode to a fibre is that of its best height", () => {
  const mode = need(solve("extraordinary", 1.55e-6, { cells: { x: 64, y: 100 } }));
  const { value, depth, at } = fibreCoupling(mode, 10.4e-6);
  assert.ok(value > 0.7 && value < 0.95, `found ${value}`);
  assertClose(at(0, depth), value, { rel: 1e-12 });
  for (const by of [-0.3e-6, 0.3e-6]) {
    assert.ok(at(0, depth + by) < value);
    assert.ok(at(by, depth) < value);
  }
  assertClose(at(1e-6, depth), at(-1e-6, depth), { rel: 1e-12 });
  assert.throws(() => fibreCoupling(mode, 0), /found mode-field diameter 0 m/);
});

Deno.test("diffusion lengths grow with time and temperature and keep the titanium", () => {
  const length = titaniumDiffusionLength(8, 1060);
  assert.ok(length > 3e-6 && length < 8e-6, `found ${length}`);
  assertClose(titaniumDiffusionLength(32, 1060), 2 * length, { rel: 1e-12 });
  assert.ok(titaniumDiffusionLength(8, 1080) > length);
  const dose = (guide: typeof stripe) => surfaceConcentration(guide, 0) * guide.depth;
  const wide = { ...stripe, width: 1e-3 };
  assertClose(dose({ ...wide, depth: length }), dose(wide), { rel: 1e-9 });
  assert.throws(() => titaniumDiffusionLength(0, 1060), /found 0 h/);
  assert.deepEqual(diffusionRemarks(1060), []);
  assert.match(diffusionRemarks(1200)[0]!, /beyond_published_range: diffusion at 1200 °C .*950 to 1100/);
});

Deno.test("what lies beyond the law's published range is said with the range", () => {
  assert.deepEqual(titaniumRemarks(stripe, 1.55e-6), []);
  assert.match(titaniumRemarks(stripe, 1.7e-6)[0]!, /at 1700 nm \(law published for 0.6 to 1.6 µm/);
  assert.match(
    titaniumRemarks({ ...stripe, titanium: 0.3e-6 }, 1.55e-6)[0]!,
    /titanium at the surface 3\.11e\+21/,
  );
  assert.throws(() => titaniumSection({ ...stripe, depth: 0 }, "ordinary", 1.55e-6, 2.2), /found depth 0 m/);
});
