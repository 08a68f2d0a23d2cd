import assert from "node:assert/strict";
import fc from "fast-check";
import { inherit, type Observation, spreadFromDefault } from "../../../models/pooling/mod.ts";
import { assertClose } from "../../assert_close.ts";

const SPREAD = { lotSd: 0.05, waferSd: 0.03, dieSd: 0.02, guideSd: 0.01 };
const DEFAULT = { value: 0.5, u: 0.2, from: "bulk-ktp" };
const at = (guide: string, value: number, u: number, index: number, widthUm = 3): Observation => {
  const [wafer, die] = guide.split("/");
  return { wafer: wafer!, die: `${wafer}/${die}`, guide, value, u, index, widthUm };
};
const guide = (id: string, widthUm = 3) => {
  const [wafer, die] = id.split("/");
  return { wafer: wafer!, die: `${wafer}/${die}`, guide: id, widthUm };
};

Deno.test("inherit() keeps a guide's own reading and averages its repeats by weight", () => {
  const pool = inherit([at("A/01/g1", 0.3, 0.1, 0), at("A/01/g1", 0.6, 0.2, 1)], SPREAD, DEFAULT, "L");
  const own = pool.estimate(guide("A/01/g1"));
  assert.equal(own.basis, "measured");
  assert.deepEqual(own.used, [0, 1]);
  assertClose(own.value, (0.3 / 0.01 + 0.6 / 0.04) / (1 / 0.01 + 1 / 0.04), { rel: 1e-12 });
  assertClose(own.u, 1 / Math.sqrt(125), { rel: 1e-12 });
});

Deno.test("inherit() adds the variance of every level that it crosses", () => {
  const pool = inherit([at("A/01/g1", 0.3, 0.004, 7)], SPREAD, DEFAULT, "L");
  const u0 = Math.hypot(0.004, 0.01); // the die mean: its reading and the guide that it was read on
  const die = pool.estimate(guide("A/01/g2"));
  assert.deepEqual([die.basis, die.from, die.used], ["die", "A/01", [7]]);
  assertClose(die.u, Math.hypot(u0, 0.01), { rel: 1e-12 });
  const wafer = pool.estimate(guide("A/02/g1"));
  assert.deepEqual([wafer.basis, wafer.from], ["wafer", "A"]);
  assertClose(wafer.u, Math.hypot(u0, 0.02, 0.02, 0.01), { rel: 1e-12 });
  const lot = pool.estimate(guide("B/02/g1"));
  assert.deepEqual([lot.basis, lot.from], ["lot", "L"]);
  assertClose(lot.u, Math.hypot(u0, 0.02, 0.03, 0.03, 0.02, 0.01), { rel: 1e-12 });
  for (const e of [die, wafer, lot]) assert.equal(e.value, 0.3);
});

Deno.test("inherit() falls back to the platform's default, and refuses when there is none", () => {
  const pool = inherit([], SPREAD, DEFAULT, "L");
  const e = pool.estimate(guide("A/01/g1"));
  assert.deepEqual([e.value, e.u, e.basis, e.from], [0.5, 0.2, "platform", "bulk-ktp"]);
  assert.throws(() => inherit([], SPREAD, null, "L").estimate(guide("A/01/g1")), RangeError);
});

Deno.test("inherit() takes the spread of a die from its own guides once four are measured", () => {
  const values = [0.1, 0.2, 0.3, 0.4];
  const pool = inherit(values.map((v, i) => at(`A/01/g${i}`, v, 0, i)), SPREAD, DEFAULT, "L");
  const e = pool.estimate(guide("A/01/g9"));
  const variance = values.reduce((s, v) => s + (v - 0.25) ** 2, 0) / 3;
  assertClose(e.value, 0.25, { rel: 1e-12 });
  assertClose(e.u, Math.sqrt(variance / 4 + variance), { rel: 1e-12 });
});

Deno.test("inherit() prefers neighbours of the same design width, and says when there were none", () => {
  const pool = inherit(
    [at("A/01/g1", 0.3, 0.01, 0, 3), at("A/01/g2", 0.9, 0.01, 1, 5)],
    SPREAD,
    DEFAULT,
    "L",
  );
  assert.equal(pool.estimate(guide("A/01/g3", 3)).value, 0.3);
  const other = pool.estimate(guide("A/01/g3", 4));
  assertClose(other.value, 0.6, { rel: 1e-12 });
  assert.equal(other.otherWidth, true);
});

Deno.test("inherit() takes a die-level reading for the whole die", () => {
  const pool = inherit([{ wafer: "A", die: "A/01", value: 6, u: 0.2, index: 3 }], SPREAD, DEFAULT, "L");
  const e = pool.estimate(guide("A/01/g1"));
  assert.equal(e.basis, "die");
  assertClose(e.u, Math.hypot(0.2, 0.01), { rel: 1e-12 });
});

Deno.test("inherit() never gives an unmeasured guide less uncertainty than its level has spread", () => {
  fc.assert(fc.property(
    fc.array(
      fc.tuple(
        fc.integer({ min: 0, max: 2 }),
        fc.integer({ min: 0, max: 3 }),
        fc.double({ min: 0, max: 1, noNaN: true }),
      ),
      {
        minLength: 1,
        maxLength: 20,
      },
    ),
    (rows) => {
      const observations = rows.map(([w, d, v], i) => at(`W${w}/0${d}/g${i}`, v, 0.05, i));
      const pool = inherit(observations, SPREAD, DEFAULT, "L");
      const unmeasured = pool.estimate(guide("W0/00/g99"));
      const values = observations.map((o) => o.value);
      assert.ok(unmeasured.u >= 0);
      assert.ok(
        unmeasured.value >= Math.min(...values) - 1e-12 && unmeasured.value <= Math.max(...values) + 1e-12,
      );
      assert.ok(["die", "wafer", "lot"].includes(unmeasured.basis));
    },
  ));
});

Deno.test("spreadFromDefault() shares out exactly the default's variance", () => {
  const s = spreadFromDefault(0.2);
  assertClose(Math.hypot(s.lotSd, s.waferSd, s.dieSd, s.guideSd), 0.2, { rel: 1e-12 });
});
