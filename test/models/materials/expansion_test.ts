import assert from "node:assert/strict";
import { expansionFactor } from "../../../models/materials/mod.ts";
import { assertClose } from "../../assert_close.ts";

// Kim & Smith (1969) and Emanueli & Arie (2003); polynomials from memory, factors at 100 °C recomputed.
Deno.test("expansion from 25 to 100 °C is the published one", () => {
  assertClose(expansionFactor("CLN", "x", 100), 1.00118481, { abs: 5e-9 });
  assertClose(expansionFactor("KTP", "x", 100), 1.00056438, { abs: 5e-9 });
});

Deno.test("LiNbO3 expands alike along x, y and o, and less along the optic axis; doping changes nothing", () => {
  for (const material of ["CLN", "MgO:CLN"] as const) {
    assert.equal(expansionFactor(material, "y", 80), expansionFactor("CLN", "x", 80));
    assert.equal(expansionFactor(material, "o", 80), expansionFactor("CLN", "x", 80));
    assert.equal(expansionFactor(material, "e", 80), expansionFactor("CLN", "z", 80));
    assertClose(expansionFactor(material, "z", 75), 1 + 0.75e-5 * 50 - 7.7e-9 * 2500, { abs: 1e-15 });
    assert.ok(expansionFactor(material, "z", 80) < expansionFactor(material, "x", 80));
  }
});

Deno.test("lengths hold at 25 °C and shrink below", () => {
  for (const material of ["CLN", "KTP"] as const) {
    assert.equal(expansionFactor(material, "x", 25), 1);
    assert.ok(expansionFactor(material, "x", 20) < 1);
  }
});

Deno.test("KTP along y or z, an axis it does not have, and a temperature beyond the limits are refused", () => {
  assert.throws(() => expansionFactor("KTP", "z", 30), /RangeError.*KTP along "z".*x only/);
  assert.throws(() => expansionFactor("KTP", "y", 30), RangeError);
  assert.throws(() => expansionFactor("KTP", "o", 30), RangeError);
  assert.throws(() => expansionFactor("CLN", "x", 251), /RangeError.*251 °C.*5 to 250 °C/);
  assert.throws(() => expansionFactor("CLN", "x", NaN), RangeError);
});
