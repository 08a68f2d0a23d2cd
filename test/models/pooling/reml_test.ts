import assert from "node:assert/strict";
import { type LotObservation, reml } from "../../../models/pooling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import { assertClose } from "../../assert_close.ts";

const stats = JSON.parse(Deno.readTextFileSync("fixtures/check-values/stats.json"));

/** One-way data: groups are dies, exact readings are guides, whose variance is the residual one. */
const oneWay = (groups: readonly (readonly number[])[]): LotObservation[] =>
  groups.flatMap((values, d) =>
    values.map((value, g) => ({
      lot: "L",
      wafer: "W",
      die: `${d}`,
      guide: `${d}/${g}`,
      value,
      u: 0,
      index: 100 * d + g,
    }))
  );

Deno.test("reml() gives the variance components of the dyestuff data", () => {
  // O. L. Davies; G. E. P. Box & G. C. Tiao, Bayesian Inference in Statistical Analysis (1973); values recomputed.
  const data = stats.one_way_random.dyestuff;
  const { variances, mean: centre, uMean } = reml(oneWay(data.groups), ["die", "guide"]);
  assertClose(variances[2], 1764.05, { rel: 1e-7 }, "between batches");
  assertClose(variances[3], data.MSW, { rel: 1e-7 }, "within batches");
  assertClose(
    variances[2] / (variances[2] + variances[3]),
    data.ICC,
    { rel: 1e-7 },
    "intraclass correlation",
  );
  assertClose(centre, data.grand, { rel: 1e-12 }, "mean");
  assertClose(uMean, data.se_grand, { rel: 1e-7 }, "standard error of the mean");
});

Deno.test("reml() gives the nested variance components of the oxide thickness data", () => {
  // J. C. Pinheiro & D. M. Bates, Mixed-Effects Models in S and S-PLUS (2000): s.d. 11.398, 5.9888, 3.5453 (from memory).
  const data = stats.nested_oxide;
  const found = reml(
    data.thickness.map((value: number, k: number): LotObservation => ({
      lot: `${Math.floor(k / 9)}`,
      wafer: `${Math.floor(k / 3)}`,
      die: `${k}`,
      guide: `${k}/g`,
      value,
      u: 0,
      index: k,
    })),
    ["lot", "wafer", "guide"],
  );
  const [lot, wafer, die, guide] = found.variances;
  assertClose(lot, data.variance[0], { rel: 1e-6 }, "lots");
  assertClose(wafer, data.variance[1], { rel: 1e-6 }, "wafers");
  assertClose(guide, data.variance[2], { rel: 1e-6 }, "sites");
  assert.equal(die, 0);
  assertClose(found.uMean, data.se_grand, { rel: 1e-7 }, "standard error of the mean");
});

Deno.test("reml() takes known reading errors off: days of the voltage standard", () => {
  // JCGM 100:2008, H.5: ten days of five readings; between days 42.64 µV, u of the mean 18.05 µV (table from memory).
  const data = stats.one_way_random.gum_h5;
  const u = data.s_b_uV / Math.sqrt(data.n_per_day);
  const days = data.day_mean_uV_minus_10V as number[];
  const found = reml(
    days.map((value, k) => ({ lot: "L", wafer: "W", die: "d", guide: `${k}`, value, u, index: k })),
    ["guide"],
  );
  assertClose(Math.sqrt(found.variances[3]), data.between_day_sd_uV, { rel: 1e-5 }, "between days");
  assertClose(found.mean, data.mean_uV, { rel: 1e-12 }, "mean");
  assertClose(found.uMean, data.u_mean_uV, { rel: 1e-5 }, "u of the mean");
});

Deno.test("reml() keeps its digits where seven of them are the same in all data", () => {
  // NIST StRD, AtmWtAg, certified analysis of variance: the components follow from the two mean squares.
  const data = stats.one_way_random.atmwtag;
  const found = reml(oneWay(data.groups), ["die", "guide"]);
  const within = data.residual_sd ** 2;
  assertClose(found.variances[3], within, { rel: 1e-6 }, "within");
  assertClose(found.variances[2], within * (data.F - 1) / data.n_per_group, { rel: 1e-6 }, "between");
});

Deno.test("reml() gives 0 where units differ less than their errors explain, and pools the rest", () => {
  // Equal means: the between mean square is 0, so the one variance left is that of all 6 about their mean, 5 df.
  const found = reml(oneWay([[1, 3], [2, 2.4], [1.9, 2.3]]), ["die", "guide"]);
  const all = [1, 3, 2, 2.4, 1.9, 2.3];
  assert.equal(found.variances[2], 0);
  assertClose(found.variances[3], standardDeviation(all) ** 2, { rel: 1e-6 });
});

Deno.test("reml() is unbiased over simulated balanced lots", () => {
  const random = randomFrom("unbiased");
  const truth = [4, 2.25, 1];
  const found: number[][] = [[], [], []];
  for (let n = 0; n < 250; n++) {
    const observations: LotObservation[] = [];
    for (let l = 0; l < 6; l++) {
      const lot = 2 * random.normal();
      for (let d = 0; d < 4; d++) {
        const die = lot + 1.5 * random.normal();
        for (let g = 0; g < 3; g++) {
          const value = die + random.normal() + 0.3 * random.normal();
          observations.push({
            lot: `${l}`,
            wafer: `${l}`,
            die: `${l}/${d}`,
            guide: `${l}/${d}/${g}`,
            value,
            u: 0.3,
            index: 0,
          });
        }
      }
    }
    const { variances: [lot, , die, guide] } = reml(observations, ["lot", "die", "guide"]);
    [lot, die, guide].forEach((v, i) => found[i]!.push(v));
  }
  found.forEach((values, i) => {
    const error = standardDeviation(values) / Math.sqrt(values.length);
    assertClose(mean(values), truth[i]!, { abs: 3 * error }, ["lots", "dies", "guides"][i]!);
    // The Monte-Carlo error must be small enough for the check to mean something.
    assert.ok(error < 0.15 * truth[i]!);
  });
});

Deno.test("reml() refuses data without spread", () => {
  assert.throws(() => reml(oneWay([[1, 1], [1, 1]]), ["die"]), RangeError);
  assert.throws(() => reml([], ["die"]), RangeError);
});
