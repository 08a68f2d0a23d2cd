import assert from "node:assert/strict";
import {
  rubidiumRemarks,
  rubidiumSection,
  type SolvedMode,
  solveGuide,
  solveOutput,
  type SolverDesign,
} from "../../../../models/guides/mod.ts";
import { exchangedIndex } from "../../../../models/guides/rubidium_profile.ts";
import { assertClose } from "../../../assert_close.ts";

const guide = { substrate: 1.7342991, cover: 1, step: 0.015, depth: 8e-6, width: 3e-6 };
const lambda = 1.55e-6;

// Second implementation, outside this project: uniform grid of square cells (0.25 and 0.125 µm, extrapolated), sparse
// shift-invert Lanczos of scipy 1.10: n_eff − n_s = 1.5841e-3.
Deno.test("an exchanged guide has the index of an independent finite-difference solution", () => {
  const mode = solveGuide(rubidiumSection(guide), lambda) as SolvedMode;
  assertClose(mode.excess, 1.5841e-3, { abs: 3e-6 });
});

Deno.test("the effective-index route over-estimates a narrow exchanged guide by almost half", () => {
  const mode = solveGuide(rubidiumSection(guide), lambda) as SolvedMode;
  const over = (exchangedIndex(guide, lambda)! - mode.nEff) / mode.excess;
  assert.ok(over > 0.4 && over < 0.5, `found ${over}`);
  // A wide guide is a plane one: there the two agree.
  const wide = { ...guide, width: 30e-6 };
  const plane = solveGuide(rubidiumSection(wide), lambda) as SolvedMode;
  assertClose(exchangedIndex(wide, lambda)!, plane.nEff, { abs: 2e-5 });
});

Deno.test("an impossible exchange is refused with what was found", () => {
  for (const part of [{ step: 0 }, { width: -1 }, { depth: NaN }]) {
    assert.throws(
      () => rubidiumSection({ ...guide, ...part }),
      /Cannot exchange a guide: found (step|width|depth)/,
    );
  }
});

Deno.test("an unusual index step is said with the usual ones", () => {
  assert.deepEqual(rubidiumRemarks(0.015, "TE"), []);
  for (const step of [0.009, 0.03]) {
    assert.match(
      rubidiumRemarks(step, "TM")[0]!,
      /beyond_published_range: index step 0\.0[0-9]+ for TM \(0\.01 to 0\.02/,
    );
  }
});

Deno.test("a design's output at a wavelength is plain numbers, or the reason why there is none", () => {
  const design: SolverDesign = {
    material: "KTP",
    axes: { TE: "y", TM: "z" },
    process: { profile: "rubidium-exchanged", exchange_depth_um: 8, index_step: { TE: 0.015, TM: 0.015 } },
    cover: 1,
    field: "scalar",
    geometry: { width_um: 3 },
    span: { width_um: 0.5 },
    lambda: [0.75e-6, 1.65e-6],
    temperatureC: [15, 130],
  };
  const found = solveOutput(design, "TE", lambda, 25, [10.4e-6, 5e-6]);
  assert.ok(!found.cutOff);
  assert.deepEqual(JSON.parse(JSON.stringify(found)), found);
  assert.deepEqual(found.modes, { even: 1, odd: 0 });
  assert.equal(found.fibres.length, 2);
  for (const { value, depth } of found.fibres) assert.ok(value > 0.5 && value < 1 && depth > 0);
  assert.ok(found.shape.mfdX > 4e-6 && found.shape.mfdX < 8e-6);
  const none = solveOutput({ ...design, geometry: { width_um: 0.8 } }, "TE", lambda, 25);
  assert.ok(none.cutOff);
  assert.match(none.reason, /cut-off/);
});
