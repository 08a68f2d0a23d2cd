import { conformity, meets, summarise } from "../../../models/decision/conformity.ts";
import { drawTrait, nestedStrata } from "../../../models/decision/draws.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

// Published examples of propagation by sampling and of joint conformity, through the program's own draws.

const stats = JSON.parse(Deno.readTextFileSync("fixtures/check-values/stats.json"));
const N = 65536;
const strata = (name: string) => nestedStrata(N, 16, randomFrom(name));
const normal = (name: string, value: number, u: number) => drawTrait({ value, u }, {}, strata(name));
/** Rectangular with a standard deviation. */
const rectangular = (name: string, centre: number, sd: number) =>
  strata(name).map((p) => centre + sd * Math.sqrt(12) * (p - 0.5));
const total = (parts: readonly Float64Array[]) =>
  Float64Array.from(parts[0]!, (_, k) => parts.reduce((sum, p) => sum + p[k]!, 0));

Deno.test("summarise() propagates four equal rectangular inputs", () => {
  // JCGM 101:2008, 9.2.3: u 2, 95 % interval ±3.88 (from memory; exact Irwin–Hall distribution 3.879407).
  const s = summarise(total([0, 1, 2, 3].map((i) => rectangular(`r${i}`, 0, 1))))!;
  const { u, interval95: [lo, hi] } = stats.jcgm101.additive_rect;
  assertClose(s.u, u, { rel: 0.005 }, "u");
  assertClose(s.lo, lo, { rel: 0.01 }, "lo");
  assertClose(s.hi, hi, { rel: 0.01 }, "hi");
});

Deno.test("summarise() propagates one dominant rectangular input, where the normal interval is too wide", () => {
  // JCGM 101:2008, 9.2.4: u 10.1, ±17.0 against ±19.9 (from memory; exact convolution 17.015814).
  const s = summarise(total([1, 1, 1, 10].map((sd, i) => rectangular(`d${i}`, 0, sd))))!;
  const { u, interval95: [lo, hi] } = stats.jcgm101.additive_rect_one_dominant;
  assertClose(s.u, u, { rel: 0.003 }, "u");
  assertClose(s.lo, lo, { rel: 0.005 }, "lo");
  assertClose(s.hi, hi, { rel: 0.005 }, "hi");
});

Deno.test("summarise() propagates the product of the mass calibration", () => {
  // JCGM 101:2008, 9.3 (from memory, recomputed): mean 1.2340, u 0.0755 mg, 95 % about 1.084 … 1.383.
  const [m, d] = [normal("m", 100_000, 0.05), normal("d", 1.234, 0.02)];
  const within = (name: string, low: number, high: number) => strata(name).map((p) => low + p * (high - low));
  const [air, w, r] = [within("air", 1.1, 1.3), within("w", 7000, 9000), within("r", 7950, 8050)];
  const s = summarise(
    m.map((x, k) => (x + d[k]!) * (1 + (air[k]! - 1.2) * (1 / w[k]! - 1 / r[k]!)) - 100_000),
  )!;
  const published = stats.jcgm101.mass;
  assertClose(s.mean, published.mean, { abs: 1e-3 }, "mean");
  assertClose(s.u, published.u_exact, { rel: 0.005 }, "u");
  assertClose(s.lo, published.mc_symmetric_95[0], { abs: 2e-3 }, "lo");
  assertClose(s.hi, published.mc_symmetric_95[1], { abs: 2e-3 }, "hi");
});

Deno.test("summarise() propagates the squares of the comparison loss where slopes vanish", () => {
  // JCGM 101:2008, 9.4, x₁ = 0: mean and u 50e−6, where first order gives u = 0; exact scaled chi-squared distribution.
  const [a, b] = [normal("x1", 0, 0.005), normal("x2", 0, 0.005)];
  const s = summarise(a.map((x, k) => x * x + b[k]! ** 2))!;
  const { mean, u } = stats.jcgm101.comparison_loss.x1_0;
  assertClose(s.mean, mean, { rel: 0.01 }, "mean");
  assertClose(s.u, u, { rel: 0.02 }, "u");
  // 2.5 % and 97.5 % of an exponential with that mean.
  assertClose(s.lo, -mean * Math.log(0.975), { rel: 0.05 }, "lo");
  assertClose(s.hi, -mean * Math.log(0.025), { rel: 0.02 }, "hi");
});

Deno.test("conformity() keeps the correlation between two requirements", () => {
  // P(X > 0, Y > 0) = 1/4 + asin(ρ)/2π; P(X < 1, Y < 1) at ρ = 0.6 by quadrature. Products of the single ones are wrong.
  const [x, z] = [normal("x", 0, 1), normal("z", 0, 1)];
  const correlated = (rho: number) => x.map((v, k) => rho * v + Math.sqrt(1 - rho * rho) * z[k]!);
  const joint = (rho: number, atLeast: number, atMost: number) =>
    conformity(
      [meets(x, { atLeast, atMost }), meets(correlated(rho), { atLeast, atMost })],
      new Uint8Array(N).fill(1),
    ).joint;
  const sd = 4 * Math.sqrt(0.25 / N);
  assertClose(joint(0.5, 0, Infinity), stats.bivariate_normal.rho_0p5, { abs: sd }, "ρ 0.5");
  assertClose(joint(0.8, 0, Infinity), stats.bivariate_normal.rho_0p8, { abs: sd }, "ρ 0.8");
  assertClose(
    joint(0.6, -Infinity, 1),
    stats.bivariate_normal.both_below_1_rho_0p6,
    { abs: sd },
    "both below 1",
  );
});
