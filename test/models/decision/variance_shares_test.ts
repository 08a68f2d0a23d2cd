import assert from "node:assert/strict";
import { drawTrait, nestedStrata } from "../../../models/decision/draws.ts";
import { type TraitDraws, varianceShares } from "../../../models/decision/variance_shares.ts";
import { randomFrom } from "../../../shared/random.ts";
import { standardDeviation } from "../../../shared/statistics.ts";
import { assertClose } from "../../assert_close.ts";

const stats = JSON.parse(Deno.readTextFileSync("fixtures/check-values/stats.json"));
const normal = (trait: string, value: number, u: number, n = 256): TraitDraws => ({
  trait,
  draws: drawTrait({ value, u }, {}, nestedStrata(n, 16, randomFrom(trait))),
});
const rectangular = (trait: string, low: number, high: number, n: number): TraitDraws => ({
  trait,
  draws: nestedStrata(n, 16, randomFrom(trait)).map((p) => low + p * (high - low)),
});
const figure = (traits: readonly TraitDraws[], f: (x: number[]) => number): Float64Array =>
  Float64Array.from(traits[0]!.draws, (_, k) => f(traits.map((t) => t.draws[k]!)));

Deno.test("varianceShares() of a sum are the squares of its terms", () => {
  const traits = [normal("a", 1, 1), normal("b", 0, 2), normal("c", 5, 3), normal("idle", 0, 1)];
  const found = varianceShares(traits, figure(traits, ([a, b, c]) => 2 * a! - b! + c!))!;
  const total = 4 + 4 + 9;
  [4 / total, 4 / total, 9 / total, 0].forEach((share, i) => {
    assertClose(found.traits[i]!.share, share, { abs: 2 * found.resolution + 0.03 }, found.traits[i]!.trait);
  });
  [2, -1, 1, 0].forEach((slope, i) =>
    assertClose(found.traits[i]!.slope!, slope, { abs: 1e-9 }, `slope ${i}`)
  );
  assertClose(found.linearU!, found.u, { rel: 1e-9 }, "a linear figure needs no more than slopes");
  assertClose(found.linearU!, Math.sqrt(total), { rel: 0.1 });
});

Deno.test("varianceShares() finds the first-order indices of a curved figure with an interaction", () => {
  // sin x + 7 sin² y + 0.1 z⁴ sin x on (−π, π): 0.3139, 0.4424, 0 (T. Ishigami & T. Homma, Proc. ISUMA'90, 398 (1990); the
  // indices follow in closed form: V = a²/8 + bπ⁴/5 + b²π⁸/18 + 1/2, V₁ = (1 + bπ⁴/5)²/2, V₂ = a²/8).
  const [a, b] = [7, 0.1];
  const V = a * a / 8 + b * Math.PI ** 4 / 5 + b * b * Math.PI ** 8 / 18 + 0.5;
  const traits = ["x", "y", "z"].map((t) => rectangular(t, -Math.PI, Math.PI, 4096));
  const found = varianceShares(
    traits,
    figure(traits, ([x, y, z]) => Math.sin(x!) + a * Math.sin(y!) ** 2 + b * z! ** 4 * Math.sin(x!)),
  )!;
  assertClose(found.traits[0]!.share, (1 + b * Math.PI ** 4 / 5) ** 2 / 2 / V, { abs: 0.03 }, "x");
  assertClose(found.traits[1]!.share, a * a / 8 / V, { abs: 0.03 }, "y");
  assertClose(found.traits[2]!.share, 0, { abs: 0.02 }, "z");
  assertClose(found.rest, 1 - (0.3139 + 0.4424), { abs: 0.05 }, "interaction");
});

Deno.test("varianceShares() shows what linear propagation misses in the mass calibration", () => {
  // JCGM 101:2008, 9.3: u 0.0755 mg, first order 0.0539 (printed numbers from memory, recomputed); air density acts only
  // through its product with the densities of the weights, so half of the variance belongs to no input alone.
  const n = 65536;
  const traits = [
    normal("reference", 100_000, 0.05, n),
    normal("difference", 1.234, 0.02, n),
    rectangular("air", 1.1, 1.3, n),
    rectangular("weight", 7000, 9000, n),
    rectangular("reference density", 7950, 8050, n),
  ];
  const mass = figure(
    traits,
    ([m, d, air, w, r]) => (m! + d!) * (1 + (air! - 1.2) * (1 / w! - 1 / r!)) - 100_000,
  );
  const found = varianceShares(traits, mass)!;
  const { u_exact, u_first_order, mean: centre } = stats.jcgm101.mass;
  assertClose(found.u, u_exact, { rel: 0.003 }, "u");
  assertClose(found.linearU!, u_first_order, { rel: 0.01 }, "first order");
  assertClose(mass.reduce((s, x) => s + x, 0) / n, centre, { abs: 2e-3 }, "mean");
  assertClose(found.rest, 1 - (u_first_order / u_exact) ** 2, { abs: 0.02 }, "interaction");
});

Deno.test("varianceShares() leaves draws without a value out, and says how many it used", () => {
  const traits = [normal("a", 0, 1), normal("b", 0, 1)];
  const y = figure(traits, ([a, b]) => a! > 1 ? NaN : a! + b!);
  const found = varianceShares(traits, y)!;
  assert.equal(found.used, y.filter((x) => !Number.isNaN(x)).length);
  assertClose(found.u, standardDeviation(y.filter((x) => !Number.isNaN(x))), { rel: 1e-12 });
});

Deno.test("varianceShares() gives no slopes where the draws are too few for them, and nothing for a constant", () => {
  const many = Array.from(
    { length: 8 },
    (_, i) => ({ trait: `t${i}`, draws: normal(`t${i}`, 0, 1).draws.slice(0, 16) }),
  );
  const found = varianceShares(many, figure(many, (x) => x[0]!))!;
  assert.deepEqual([found.linearU, found.traits[0]!.slope], [null, null]);
  assertClose(found.traits[0]!.share, 1, { abs: 1e-9 });
  assert.equal(varianceShares(many, new Float64Array(16).fill(3)), null);
  assert.equal(varianceShares(many, new Float64Array(16).fill(NaN)), null);
  assert.throws(() => varianceShares(many, new Float64Array(5)), RangeError);
});

Deno.test("varianceShares() gives a trait without spread no share", () => {
  const traits = [normal("a", 0, 1), normal("fixed", 3, 0)];
  const found = varianceShares(traits, figure(traits, ([a, f]) => a! * f!))!;
  assert.deepEqual([found.traits[1]!.share, found.traits[1]!.slope], [0, null]);
  assertClose(found.traits[0]!.slope!, 3, { rel: 1e-9 });
});
