import assert from "node:assert/strict";
import fc from "fast-check";
import {
  type CrystalAxis,
  groupIndex,
  indexSource,
  type Material,
  materialRange,
  publishedRangeRemark,
  refractiveIndex,
  SELLMEIER_SETS,
} from "../../../models/materials/mod.ts";
import { nm } from "../../../shared/units.ts";
import { assertClose } from "../../assert_close.ts";

const EVERY: [Material, CrystalAxis][] = [
  ["CLN", "o"],
  ["CLN", "e"],
  ["MgO:CLN", "o"],
  ["MgO:CLN", "e"],
  ["KTP", "x"],
  ["KTP", "y"],
  ["KTP", "z"],
];

Deno.test("each material takes its own set on each axis", () => {
  const s = SELLMEIER_SETS;
  const at = (set: { index(L: number, T: number): number }) => set.index(1.3, 60);
  assert.equal(refractiveIndex("CLN", "e", 1.3e-6, 60), at(s.jundt_e));
  assert.equal(refractiveIndex("CLN", "o", 1.3e-6, 60), at(s.el_o));
  assert.equal(refractiveIndex("MgO:CLN", "e", 1.3e-6, 60), at(s.gayer5_e));
  assert.equal(refractiveIndex("MgO:CLN", "o", 1.3e-6, 60), at(s.gayer5_o));
  assert.equal(refractiveIndex("KTP", "y", 1.3e-6, 60), at(s.ktp_y));
  assert.equal(refractiveIndex("KTP", "z", 1.3e-6, 60), at(s.ktp_z));
  assert.equal(refractiveIndex("KTP", "x", 1.3e-6, 60), at(s.kato_x));
  assert.match(indexSource("KTP", "y"), /König.*Emanueli/);
});

Deno.test("LiNbO3 answers for the crystallographic axes: z is e, x and y are o", () => {
  for (const material of ["CLN", "MgO:CLN"] as const) {
    assert.equal(
      refractiveIndex(material, "z", 1e-6, 25),
      refractiveIndex(material, "e", 1e-6, 25),
    );
    assert.equal(groupIndex(material, "x", 1e-6, 25), groupIndex(material, "o", 1e-6, 25));
    assert.equal(groupIndex(material, "y", 1e-6, 25), groupIndex(material, "o", 1e-6, 25));
  }
});

Deno.test("KTP has no o or e axis", () => {
  for (const axis of ["o", "e"] as const) {
    assert.throws(() => refractiveIndex("KTP", axis, 1e-6, 25), /RangeError.*KTP.*need x, y or z/);
  }
});

Deno.test("the index of KTP rises from x to y to z", () => {
  for (let um = 0.46; um < 1.7; um += 0.02) {
    const [x, y, z] = (["x", "y", "z"] as const).map((axis) => refractiveIndex("KTP", axis, um * 1e-6, 25));
    assert.ok(x! < y! && y! < z!, `${um} µm`);
  }
});

Deno.test("the limits of wavelength and temperature belong to the range, anything beyond is refused by name", () => {
  const limits: [Material, CrystalAxis, number, number][] = [
    ["CLN", "o", 400, 4000],
    ["CLN", "e", 400, 4000],
    ["MgO:CLN", "o", 500, 1700],
    ["MgO:CLN", "e", 500, 4000],
    ["KTP", "x", 450, 3500],
    ["KTP", "y", 450, 3500],
    ["KTP", "z", 450, 3500],
  ];
  for (const [material, axis, lo, hi] of limits) {
    for (const f of [refractiveIndex, groupIndex, publishedRangeRemark]) {
      for (const T of [5, 250]) {
        for (const l of [lo, hi]) assert.doesNotThrow(() => f(material, axis, nm(l), T));
      }
      const wavelengths = new RegExp(`RangeError.*${material} along ${axis}.*need ${lo} to ${hi} nm`);
      for (const l of [lo - 0.01, hi + 0.01, 0, -800, NaN, Infinity]) {
        assert.throws(() => f(material, axis, nm(l), 25), wavelengths);
      }
      for (const T of [4.99, 250.01, NaN]) {
        assert.throws(() => f(material, axis, 1e-6, T), /RangeError.*need 5 to 250 °C/);
      }
    }
    const range = materialRange(material, axis);
    assertClose(range.lambda[0], nm(lo), { rel: 1e-9 });
    assertClose(range.lambda[1], nm(hi), { rel: 1e-9 });
    assert.deepEqual(range.temperatureC, [5, 250]);
  }
});

Deno.test("the group index is n − λ·dn/dλ by differencing, and exceeds n where dispersion is normal", () => {
  fc.assert(fc.property(
    fc.constantFrom(...EVERY),
    fc.double({ min: 0.51e-6, max: 1.69e-6, noNaN: true }),
    fc.double({ min: 5, max: 250, noNaN: true }),
    ([material, axis], lambda, T) => {
      const h = 2e-10;
      const n = (l: number) => refractiveIndex(material, axis, l, T);
      const slope = (n(lambda + h) - n(lambda - h)) / (2 * h);
      const ng = groupIndex(material, axis, lambda, T);
      // Third derivative < 40 /µm³ at 0.51 µm: h² n‴/6 is below 1e-6 here.
      assertClose(ng, n(lambda) - lambda * slope, { abs: 2e-6 }, `${material} ${axis}`);
      assert.ok(ng > n(lambda));
    },
  ));
});

Deno.test("the index has no jump: a step of 1 pm or 1 mK moves it by no more than its slopes allow", () => {
  fc.assert(fc.property(
    fc.constantFrom(...EVERY),
    fc.double({ min: 0.51e-6, max: 1.69e-6, noNaN: true }),
    fc.double({ min: 5, max: 249, noNaN: true }),
    ([material, axis], lambda, T) => {
      const n = refractiveIndex(material, axis, lambda, T);
      assert.ok(Math.abs(refractiveIndex(material, axis, lambda + 1e-12, T) - n) < 1e-6);
      assert.ok(Math.abs(refractiveIndex(material, axis, lambda, T + 1e-3) - n) < 1e-6);
    },
  ));
});

Deno.test("a remark names the published range where the answer is an extrapolation, and only there", () => {
  assert.equal(publishedRangeRemark("CLN", "e", 1.55e-6, 25), null);
  assert.equal(publishedRangeRemark("CLN", "o", 0.775e-6, 100), null);
  assert.equal(publishedRangeRemark("KTP", "y", 1.55e-6, 40), null);
  assert.equal(publishedRangeRemark("KTP", "z", 0.791e-6, 40), null);
  assert.match(
    publishedRangeRemark("CLN", "e", 1.55e-6, 15)!,
    /^beyond_published_range: CLN e.*20 to 250 °C/,
  );
  assert.match(
    publishedRangeRemark("KTP", "y", 0.791e-6, 25)!,
    /^beyond_published_range: KTP y.*1\.2 to 3\.5 µm/,
  );
  assert.match(publishedRangeRemark("KTP", "y", 1.7e-6, 26)!, /temperature dependence.*0\.532 to 1\.585 µm/);
  assert.equal(publishedRangeRemark("KTP", "y", 1.7e-6, 25), null, "the temperature part vanishes at 25 °C");
  assert.match(publishedRangeRemark("MgO:CLN", "e", 1.55e-6, 20)!, /24\.5 to 200 °C/);
});
