import assert from "node:assert/strict";
import fc from "fast-check";
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import { Matrix, solve } from "ml-matrix";
import {
  joinSignals,
  NELSON,
  RUN_RULES,
  type RunRule,
  runSignals,
  WESTERN_ELECTRIC,
} from "../../../../models/decision/charts/run_rules.ts";
import { assertClose } from "../../../assert_close.ts";

const ALL = Object.keys(RUN_RULES) as RunRule[];

/** One z in each zone, and the zone's borders. */
const ZONES = [-3.5, -2.5, -1.5, -0.5, 0.5, 1.5, 2.5, 3.5];
const BORDERS = [-Infinity, -3, -2, -1, 0, 1, 2, 3, Infinity];

/** What the rules 1 to 4 can still remember of a past without signal: per side the points beyond 2 and 1, and the run. */
function memory(past: readonly number[]): string {
  return [1, -1].map((sign) => {
    const beyond = (line: number, length: number) =>
      past.slice(-length).map((z) => sign * z > line ? 1 : 0).join("").padStart(length, "0");
    const run = past.length - 1 - past.findLastIndex((z) => sign * z < 0);
    return `${beyond(2, 2)}.${beyond(1, 4)}.${Math.min(run, 7)}`;
  }).join("|");
}

/** Mean points to the first signal of independent normal points, by the chain of memories (exact but for rounding). */
function averageRunLength(rules: readonly RunRule[], shift: number): { arl: number; states: number } {
  const share = ZONES.map((_, k) =>
    normalCdf(BORDERS[k + 1]! - shift, 0, 1) - normalCdf(BORDERS[k]! - shift, 0, 1)
  );
  const pasts: number[][] = [[]];
  const index = new Map([[memory([]), 0]]);
  const moves: [number, number, number][] = [];
  for (let from = 0; from < pasts.length; from++) {
    for (const [k, z] of ZONES.entries()) {
      const next = [...pasts[from]!, z].slice(-8);
      if (runSignals(next, rules).some((s) => s.at === next.length - 1)) continue;
      const key = memory(next);
      if (!index.has(key)) {
        index.set(key, pasts.length);
        pasts.push(next);
      }
      moves.push([from, index.get(key)!, share[k]!]);
    }
  }
  const system = Matrix.eye(pasts.length);
  for (const [from, to, p] of moves) system.set(from, to, system.get(from, to) - p);
  const lengths = solve(system, Matrix.ones(pasts.length, 1));
  return { arl: lengths.get(0, 0), states: pasts.length };
}

Deno.test("runSignals() has the exact average run lengths of the Western Electric rules", () => {
  // C. W. Champ, W. H. Woodall, Technometrics 29, 393 (1987) (from memory; 91.75 also in the NIST/SEMATECH e-Handbook, 6.3.2).
  const [one, two, , four] = WESTERN_ELECTRIC as [RunRule, RunRule, RunRule, RunRule];
  const cases: [RunRule[], number, number][] = [
    [[one], 0, 370.40],
    [[one, two], 0, 225.44],
    [[one, four], 0, 152.73],
    [[...WESTERN_ELECTRIC], 0, 91.75],
    [[one], 1, 43.89],
    [[...WESTERN_ELECTRIC], 1, 9.22],
  ];
  for (const [rules, shift, expected] of cases) {
    assertClose(averageRunLength(rules, shift).arl, expected, { abs: 0.005 }, `${rules} at ${shift}`);
  }
});

Deno.test("runSignals() finds the first signal of every hand-made sequence and no other", async () => {
  const stats = JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));
  const vectors = Object.entries(stats.run_rule_vectors.vectors) as [
    string,
    { z: number[]; signals: Record<string, number> },
  ][];
  assert.equal(vectors.length, 10);
  for (const [name, { z, signals }] of vectors) {
    const first: Record<string, number> = {};
    for (const s of runSignals(z, ALL)) first[s.rule] ??= s.at + 1;
    assert.deepEqual(first, signals, name);
  }
});

Deno.test("runSignals() names the points and the side of a pattern", () => {
  const z = [0.1, -2.2, 0.3, -2.4, 0];
  assert.deepEqual(runSignals(z, ["2of3_beyond_2s"]), [
    { rule: "2of3_beyond_2s", at: 3, over: [1, 3], side: "below" },
  ]);
  const falling = [3, 2, 1, 0, -1, -2, -2.5];
  assert.deepEqual(runSignals(falling, ["6_trend"]).map((s) => [s.at, s.over[0], s.side]), [
    [5, 0, "below"],
    [6, 1, "below"],
  ]);
});

Deno.test("runSignals() counts a point on a line as not beyond it", () => {
  assert.deepEqual(runSignals([3, -3], ["beyond_3s"]), []);
  assert.deepEqual(runSignals([2, 2, 2], ["2of3_beyond_2s"]), []);
  assert.deepEqual(
    runSignals(Array(20).fill(0), ["8_same_side", "9_same_side", "6_trend", "14_alternating"]),
    [],
  );
  assert.deepEqual(runSignals(Array(20).fill(1), ["15_within_1s", "8_beyond_1s_both"]), []);
  assert.equal(runSignals([Infinity], ["beyond_3s"]).length, 1);
});

Deno.test("runSignals() of a mirrored sequence are mirrored, and missing points change nothing", () => {
  const points = fc.array(fc.double({ min: -3.5, max: 3.5, noNaN: true }), { maxLength: 40 });
  const gaps = fc.array(fc.nat(3), { minLength: 40, maxLength: 40 });
  fc.assert(fc.property(points, gaps, (z, before) => {
    const found = runSignals(z, ALL);
    const mirror = { above: "below", below: "above" } as const;
    assert.deepEqual(
      runSignals(z.map((x) => -x), ALL).map((s) => ({ ...s, side: s.side && mirror[s.side] })),
      found,
    );
    const thinned: number[] = [];
    const place = z.map((x, i) => {
      for (let k = 0; k < before[i]!; k++) thinned.push(NaN);
      return thinned.push(x) - 1;
    });
    assert.deepEqual(
      runSignals(thinned, ALL),
      found.map((s) => ({ ...s, at: place[s.at], over: s.over.map((i) => place[i]) })),
    );
    for (const s of found) {
      assert.equal(s.over.at(-1), s.at);
      assert.ok(s.over.every((i, k) => k === 0 || i > s.over[k - 1]!));
    }
  }));
});

Deno.test("joinSignals() tells one long run once and keeps separate ones apart", () => {
  const z = [...Array(11).fill(0.5), -0.5, ...Array(8).fill(0.5)];
  const joined = joinSignals(runSignals(z, ["8_same_side"]));
  assert.deepEqual(joined.map((s) => [s.over[0], s.at, s.over.length]), [[0, 10, 11], [12, 19, 8]]);
  assert.deepEqual(joinSignals(runSignals([4, 4, -4], ["beyond_3s"])).length, 3);
});

Deno.test("runSignals() refuses rules it does not know or is given twice", () => {
  assert.throws(() => runSignals([0], ["toString" as RunRule]), /Cannot apply run rule "toString"/);
  assert.throws(() => runSignals([0], ["6_trend", "6_trend"]), RangeError);
  assert.equal(NELSON.length, 8);
});
