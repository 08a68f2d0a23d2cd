import assert from "node:assert/strict";
import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import { drawTrait, nestedStrata } from "../../../models/decision/draws.ts";
import { type OpenDecision, valueOfReadings } from "../../../models/decision/value_of_reading.ts";
import type { TraitDraws } from "../../../models/decision/variance_shares.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

const THRESHOLDS = { acceptAt: 0.9, rejectBelow: 0.1 };
const normal = (trait: string, value: number, u: number, n = 256): TraitDraws => ({
  trait,
  draws: drawTrait({ value, u }, {}, nestedStrata(n, 16, randomFrom(trait))),
});
const atLeast = (draws: Float64Array, limit: number): OpenDecision["figures"][number] => ({
  draws,
  limits: { atLeast: limit, atMost: Infinity },
});
const combined = (traits: readonly TraitDraws[], f: (x: number[]) => number): Float64Array =>
  Float64Array.from(traits[0]!.draws, (_, k) => f(traits.map((t) => t.draws[k]!)));

/** Variance of p over the outcomes, and P(p ≥ acceptAt), for one normal trait and a lower limit, by quadrature. */
function exact(mean: number, sd: number, u: number, limit: number): { reduction: number; accept: number } {
  const moved = sd * sd / Math.hypot(sd, u);
  const left = sd * u / Math.hypot(sd, u);
  let [s0, s1, s2, accept] = [0, 0, 0, 0];
  for (let k = -4000; k <= 4000; k++) {
    const z = k / 500;
    const w = Math.exp(-0.5 * z * z);
    const p = normalCdf((mean + moved * z - limit) / left, 0, 1);
    s0 += w;
    s1 += w * p;
    s2 += w * p * p;
    if (p >= THRESHOLDS.acceptAt) accept += w;
  }
  return { reduction: s2 / s0 - (s1 / s0) ** 2, accept: accept / s0 };
}

Deno.test("valueOfReadings() agrees with the exact preposterior analysis of one normal trait", () => {
  for (const [u, limit] of [[0.5, 0], [1, 0.4], [2, -0.7], [0.1, 0.2]] as const) {
    const traits = [normal("loss", 0, 1, 2048)];
    const question = { traits, figures: [atLeast(traits[0]!.draws, limit)], thresholds: THRESHOLDS };
    const [found] = valueOfReadings(question, [{ kind: "cutback", reads: [{ trait: "loss", u }] }]);
    const { reduction, accept } = exact(0, 1, u, limit);
    assertClose(found!.reduction, reduction, { abs: 0.004 }, `u ${u}, limit ${limit}`);
    assertClose(found!.after.accept, accept, { abs: 1.5 / 64 }, `accepted at u ${u}, limit ${limit}`);
    const p = 1 - normalCdf(limit, 0, 1);
    assertClose(found!.doubt, p * (1 - p), { abs: 0.002 });
  }
});

Deno.test("valueOfReadings() names the reading of the trait that carries the doubt", () => {
  const traits = [normal("loss", 0, 1), normal("duty", 0, 1), normal("mode", 0, 1)];
  const figures = [atLeast(combined(traits, ([a, b]) => a! + 0.3 * b!), 0.1)];
  const kinds = [
    { kind: "modes", reads: [{ trait: "mode", u: 0.1 }] },
    { kind: "poling", reads: [{ trait: "duty", u: 0.1 }] },
    { kind: "cutback", reads: [{ trait: "loss", u: 0.1 }] },
  ];
  const found = valueOfReadings({ traits, figures, thresholds: THRESHOLDS }, kinds);
  assert.deepEqual(found.map((v) => v.kind), ["cutback", "poling", "modes"]);
  assert.ok(found[0]!.reduction > 0.6 * found[0]!.doubt, `${found[0]!.reduction} of ${found[0]!.doubt}`);
  assert.ok(found[2]!.reduction < 0.02 * found[2]!.doubt, `idle reading: ${found[2]!.reduction}`);
  assert.ok(found[0]!.after.hold < 0.5 && found[2]!.after.hold === 1);
  for (const v of found) assertClose(v.after.accept + v.after.hold + v.after.reject, 1, { abs: 1e-9 });
});

Deno.test("valueOfReadings() falls with the reading's error, down to nothing", () => {
  const traits = [normal("loss", 0, 1), normal("duty", 0, 1)];
  const question = {
    traits,
    figures: [atLeast(combined(traits, ([a, b]) => a! + b!), 0)],
    thresholds: THRESHOLDS,
  };
  const at = (u: number) =>
    valueOfReadings(question, [{ kind: "r", reads: [{ trait: "loss", u }] }])[0]!.reduction;
  const values = [0, 0.3, 1, 3, 1000].map(at);
  for (let i = 1; i < values.length; i++) assert.ok(values[i]! < values[i - 1]!, values.join(" "));
  assert.ok(values.at(-1)! < 1e-4);
});

Deno.test("valueOfReadings() settles everything when all traits are read without error", () => {
  const traits = [normal("loss", 0, 1), normal("duty", 0, 1)];
  const figures = [
    atLeast(combined(traits, ([a, b]) => a! + b!), -0.3),
    { draws: traits[1]!.draws, limits: { atLeast: -Infinity, atMost: 0.8 } },
  ];
  const both = [{ trait: "loss", u: 0 }, { trait: "duty", u: 0 }];
  const [found] = valueOfReadings({ traits, figures, thresholds: THRESHOLDS }, [{
    kind: "all",
    reads: both,
  }]);
  assertClose(found!.reduction, found!.doubt, { abs: 0.01 });
  assert.equal(found!.after.hold, 0);
});

Deno.test("valueOfReadings() sees a figure that depends on the square of a trait", () => {
  const traits = [normal("duty", 0, 1), normal("loss", 0, 1)];
  const figures = [atLeast(combined(traits, ([d, l]) => 1 - d! * d! + 0.1 * l!), 0)];
  const [best, other] = valueOfReadings({ traits, figures, thresholds: THRESHOLDS }, [
    { kind: "cutback", reads: [{ trait: "loss", u: 0.05 }] },
    { kind: "poling", reads: [{ trait: "duty", u: 0.05 }] },
  ]);
  assert.equal(best!.kind, "poling");
  assert.ok(best!.reduction > 0.8 * best!.doubt && other!.reduction < 0.1 * other!.doubt);
});

Deno.test("valueOfReadings() counts draws without a value as failed and traits of one key once", () => {
  const a = normal("signal loss", 0, 1);
  const twin = { trait: "idler loss", draws: a.draws };
  const half = a.draws.map((x, k) => k % 2 === 0 ? x + 10 : NaN);
  const question = { traits: [a, twin], figures: [atLeast(half, 0)], thresholds: THRESHOLDS };
  const [found] = valueOfReadings(question, [
    { kind: "cutback", reads: [{ trait: "signal loss", u: 0.1 }, { trait: "idler loss", u: 0.1 }] },
  ]);
  assertClose(found!.doubt, 0.25, { abs: 1e-12 });
  assert.equal(found!.reduction, 0);
});

Deno.test("valueOfReadings() refuses traits without draws and draws that do not match", () => {
  const traits = [normal("loss", 0, 1)];
  const question = { traits, figures: [atLeast(traits[0]!.draws, 0)], thresholds: THRESHOLDS };
  assert.throws(
    () => valueOfReadings(question, [{ kind: "r", reads: [{ trait: "duty", u: 1 }] }]),
    RangeError,
  );
  assert.throws(
    () => valueOfReadings(question, [{ kind: "r", reads: [{ trait: "loss", u: -1 }] }]),
    RangeError,
  );
  assert.throws(() => valueOfReadings({ ...question, traits: [] }, []), RangeError);
});
