import assert from "node:assert/strict";
import fc from "fast-check";
import { type LotObservation, type Place, pooled, pools } from "../../../models/pooling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";
import { simulateLots } from "./simulated_lots.ts";

const SPREAD = { lotSd: 0.05, waferSd: 0.03, dieSd: 0.02, guideSd: 0.02 };
const UNSTATED = { lotSd: 0, waferSd: 0, dieSd: 0, guideSd: 0 };
const DEFAULT = { value: 0.5, u: 0.1, from: "bulk-ktp" };
const NOWHERE = new Map<string, Place>();

/** A reading by the id of its guide, die or wafer: `K07-1/05/g12`. */
function reading(id: string, value: number, u: number, index: number, widthUm?: number): LotObservation {
  const [wafer, die, guide] = id.split("/");
  return {
    lot: wafer!.split("-")[0]!,
    wafer: wafer!,
    ...(die === undefined ? {} : { die: `${wafer}/${die}` }),
    ...(guide === undefined ? {} : { guide: id }),
    ...(widthUm === undefined ? {} : { widthUm }),
    value,
    u,
    index,
  };
}
const guide = (id: string, widthUm?: number) => {
  const [wafer, die] = id.split("/");
  return {
    wafer: wafer!,
    die: `${wafer}/${die}`,
    guide: id,
    ...(widthUm === undefined ? {} : { widthUm }),
  };
};
const sum = (shares: object | null) => Object.values(shares!).reduce((s, x) => s + x, 0);

Deno.test("pooled() says what an estimate rests on, and is the less sure the farther it is", () => {
  const pool = pooled(
    [
      reading("A-1/01/a", 0.3, 0.01, 7),
      reading("A-1/01/b", 0.32, 0.01, 8),
      reading("B-1/01/a", 0.5, 0.01, 9),
    ],
    NOWHERE,
    SPREAD,
    DEFAULT,
    "A",
  );
  const asked = ["A-1/01/a", "A-1/01/z", "A-1/02/a", "A-2/01/a"].map((id) => pool.estimate(guide(id)));
  assert.deepEqual(asked.map((e) => [e.basis, e.from, [...e.used]]), [
    ["measured", "A-1/01/a", [7]],
    ["die", "A-1/01", [7, 8]],
    ["wafer", "A-1", [7, 8]],
    ["lot", "A", [7, 8]],
  ]);
  for (let i = 1; i < asked.length; i++) assert.ok(asked[i]!.u > asked[i - 1]!.u, `step ${i}`);
  assert.ok(asked[0]!.u < 0.01, "neighbours add to a reading");
  for (const e of asked) assertClose(sum(e.shares), 1, { abs: 1e-12 });
});

Deno.test("pooled() draws a reading towards its neighbours, the more the worse it is", () => {
  const neighbours = Array.from({ length: 6 }, (_, k) => reading(`A-1/01/g${k}`, 0.4, 0.005, k));
  const at = (u: number) =>
    pooled([...neighbours, reading("A-1/01/x", 0.44, u, 9)], NOWHERE, SPREAD, DEFAULT, "A")
      .estimate(guide("A-1/01/x"));
  const [good, fair, poor] = [at(0.001), at(0.02), at(0.2)];
  assert.ok(good.value > fair.value && fair.value > poor.value && poor.value > 0.4);
  assertClose(good.value, 0.44, { abs: 5e-4 });
  assert.ok(good.shares!.own > 0.99 && poor.shares!.own < 0.05);
});

Deno.test("pooled() returns the platform's default where no lot has a reading", () => {
  const e = pooled([], NOWHERE, SPREAD, DEFAULT, "A").estimate(guide("A-1/01/a"));
  assert.deepEqual([e.value, e.u, e.basis, e.from, e.shares], [0.5, 0.1, "platform", "bulk-ktp", null]);
  assert.throws(() => pooled([], NOWHERE, SPREAD, null, "A").estimate(guide("A-1/01/a")), RangeError);
});

Deno.test("pooled() leaves a lot without readings at least the platform's uncertainty", () => {
  const random = randomFrom("other lots");
  // Ten lots alike: they would make the next one look certain.
  const { observations, places } = simulateLots(
    { lots: 10, wafers: 2, wafersRead: 2, dies: 4, diesRead: 4, guides: 3, guidesRead: 3, u: [0.01, 0.01] },
    { mean: 0.6, spread: { lotSd: 0.002, waferSd: 0.002, dieSd: 0.002, guideSd: 0.002 } },
    random,
  );
  const e = pooled(observations, places, SPREAD, DEFAULT, "new").estimate(guide("new-1/01/a"));
  assert.deepEqual([e.basis, e.from, [...e.used]], ["platform", "bulk-ktp", []]);
  assertClose(e.value, 0.6, { abs: 0.01 });
  assert.ok(e.u >= DEFAULT.u);
});

Deno.test("pooled() keeps the stated uncertainty for a guide of which nothing near is known", () => {
  // One reading so poor that it says nothing: what is left is the default with the stated spreads.
  const pool = pooled([reading("A-1/01/a", 3, 1e4, 0)], NOWHERE, SPREAD, DEFAULT, "A");
  const e = pool.estimate(guide("A-2/01/a"));
  assertClose(e.value, 0.5, { abs: 1e-4 });
  // The default's u is the spread of everything; the integration over the spreads keeps their mean square.
  assertClose(e.u, 0.1, { rel: 0.01 });
});

Deno.test("pooled() takes readings of whole dies and wafers for what they are", () => {
  const pool = pooled(
    [reading("A-1/01", 0.48, 0.001, 0), reading("A-2", 0.52, 0.001, 1)],
    NOWHERE,
    SPREAD,
    DEFAULT,
    "A",
  );
  const [inDie, onWafer] = [pool.estimate(guide("A-1/01/a")), pool.estimate(guide("A-2/01/a"))];
  assert.deepEqual([inDie.basis, onWafer.basis], ["die", "wafer"]);
  assertClose(inDie.value, 0.48, { abs: 2e-3 });
  assertClose(inDie.u, SPREAD.guideSd, { rel: 0.08 });
  assertClose(onWafer.value, 0.52, { abs: 2e-3 });
  assertClose(onWafer.u, Math.hypot(SPREAD.guideSd, SPREAD.dieSd), { rel: 0.08 });
});

Deno.test("pooled() learns the difference between design widths, and doubts a width that nobody read", () => {
  const random = randomFrom("widths");
  const observations = Array.from({ length: 60 }, (_, k) => {
    const width = k % 2 === 0 ? 5 : 6;
    const id = `A-1/${String(k % 10).padStart(2, "0")}/g${k}`;
    return reading(id, 0.4 + 0.2 * (width - 5) + 0.01 * random.normal(), 0.01, k, width);
  });
  const pool = pooled(observations, NOWHERE, SPREAD, DEFAULT, "A");
  const [five, six, seven] = [5, 6, 7].map((w) => pool.estimate(guide("A-1/03/new", w)));
  assertClose(five!.value, 0.4, { abs: 0.02 });
  assertClose(six!.value, 0.6, { abs: 0.02 });
  assert.deepEqual([five!.otherWidth, seven!.otherWidth], [true, true]); // die 03 has only guides of 6 µm
  assert.equal(six!.otherWidth, false);
  assert.ok(seven!.u > 3 * six!.u);
});

Deno.test("pooled() takes the scale of unstated spreads from the readings, and refuses where there is none", () => {
  const two = pooled(
    [reading("A-1/01/a", 1, 0.1, 0), reading("A-1/01/b", 3, 0.1, 1)],
    NOWHERE,
    UNSTATED,
    null,
    "A",
  );
  assert.ok(two.estimate(guide("A-1/01/c")).u > 0.7);
  const one = pooled([reading("A-1/01/a", 1, 0.1, 0)], NOWHERE, UNSTATED, null, "A");
  assert.deepEqual([one.estimate(guide("A-1/01/a")).value, one.estimate(guide("A-1/01/a")).u], [1, 0.1]);
  assert.throws(() => one.estimate(guide("A-1/01/c")), RangeError);
});

Deno.test("pooled() leaves readings below a bound as they are and bounds only what is shown", () => {
  const pool = pooled(
    [reading("A-1/01/a", -0.03, 0.02, 0)],
    NOWHERE,
    { lotSd: 0.03, waferSd: 0.02, dieSd: 0.015, guideSd: 0.02 },
    { value: 0.1, u: 0.05, from: "p" },
    "A",
    { bounds: { low: 0 } },
  );
  const e = pool.estimate(guide("A-1/01/a"));
  assert.ok(e.value < 0.02 && e.bounded!.value > 0);
  assert.equal(e.bounded!.lo, 0);
  assert.ok(e.bounded!.u < e.u && e.bounded!.hi > e.bounded!.value);
});

Deno.test("pooled() does not depend on the order of the readings, nor on their unit", () => {
  const { observations, places, guides } = simulateLots(
    { lots: 2, wafers: 2, wafersRead: 2, dies: 4, diesRead: 3, guides: 3, guidesRead: 2, u: [0.005, 0.02] },
    { mean: 0.5, spread: SPREAD },
    randomFrom("order"),
  );
  const asked = guides.filter((g) => g.lot === "L0");
  const plain = pooled(observations, places, SPREAD, DEFAULT, "L0");
  const turned = pooled(observations.toReversed(), places, SPREAD, DEFAULT, "L0");
  const k = 1e6;
  const scaled = pooled(
    observations.map((o) => ({ ...o, value: o.value * k, u: o.u * k })),
    places,
    { lotSd: 0.05 * k, waferSd: 0.03 * k, dieSd: 0.02 * k, guideSd: 0.02 * k },
    { value: 0.5 * k, u: 0.1 * k, from: "p" },
    "L0",
  );
  for (const g of asked) {
    const e = plain.estimate(g);
    assertClose(turned.estimate(g).value, e.value, { rel: 1e-6 });
    assertClose(turned.estimate(g).u, e.u, { rel: 1e-4 });
    assertClose(scaled.estimate(g).value, k * e.value, { rel: 1e-6 });
    assertClose(scaled.estimate(g).u, k * e.u, { rel: 1e-4 });
  }
  assert.deepEqual(
    pooled(observations, places, SPREAD, DEFAULT, "L0").estimate(asked[0]!),
    plain.estimate(asked[0]!),
  );
});

Deno.test("pools() gives every lot what pooled() gives it alone", () => {
  const { observations, places, guides } = simulateLots(
    { lots: 3, wafers: 2, wafersRead: 2, dies: 4, diesRead: 3, guides: 3, guidesRead: 2, u: [0.005, 0.02] },
    { mean: 0.5, spread: SPREAD },
    randomFrom("shared"),
  );
  const read = observations.filter((o) => o.lot !== "L2");
  const poolOf = pools(read, places, SPREAD, DEFAULT);
  for (const lot of ["L2", "L0", "L1"]) {
    const alone = pooled(read, places, SPREAD, DEFAULT, lot);
    for (const g of guides.filter((g) => g.lot === lot)) {
      assert.deepEqual(poolOf(lot).estimate(g), alone.estimate(g));
    }
  }
});

Deno.test("pooled() shares sum to 1 and none is negative, whatever was read", () => {
  const ids = ["A-1/01/a", "A-1/01/b", "A-1/02/a", "A-2/01/a", "A-1/01", "A-2", "B-1/01/a", "B-1/02"];
  fc.assert(
    fc.property(
      fc.array(
        fc.tuple(
          fc.constantFrom(...ids),
          fc.double({ min: -1, max: 2, noNaN: true }),
          fc.double({ min: 0, max: 1, noNaN: true }),
        ),
        {
          minLength: 1,
          maxLength: 8,
        },
      ),
      (readings) => {
        const pool = pooled(
          readings.map(([id, value, u], k) => reading(id, value, u, k)),
          NOWHERE,
          SPREAD,
          DEFAULT,
          "A",
        );
        for (const id of ["A-1/01/a", "A-1/01/z", "A-1/03/a", "A-3/01/a"]) {
          const { shares, value, u } = pool.estimate(guide(id));
          assertClose(sum(shares), 1, { abs: 1e-9 });
          for (const s of Object.values(shares!)) assert.ok(s > -1e-9, JSON.stringify(shares));
          assert.ok(Number.isFinite(value) && u >= 0 && Number.isFinite(u));
        }
      },
    ),
    { numRuns: 30 },
  );
});

Deno.test("pooled() refuses numbers that are none and guides without a die", () => {
  const bad = (o: Partial<LotObservation>) => () =>
    pooled([{ ...reading("A-1/01/a", 0.3, 0.1, 0), ...o }], NOWHERE, SPREAD, DEFAULT, "A");
  assert.throws(bad({ value: NaN }), RangeError);
  assert.throws(bad({ u: -1 }), RangeError);
  assert.throws(
    () =>
      pooled(
        [{ lot: "A", wafer: "A-1", guide: "g", value: 1, u: 1, index: 0 }],
        NOWHERE,
        SPREAD,
        DEFAULT,
        "A",
      ),
    RangeError,
  );
});
