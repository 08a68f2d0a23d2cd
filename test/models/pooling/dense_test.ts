import { CholeskyDecomposition, inverse, Matrix } from "ml-matrix";
import { designOf } from "../../../models/pooling/design.ts";
import { fixedEffects } from "../../../models/pooling/fixed_effects.ts";
import { forestOf, leavesOf, type LotObservation } from "../../../models/pooling/forest.ts";
import { informationShares } from "../../../models/pooling/information.ts";
import { type Asked } from "../../../models/pooling/lot_fit.ts";
import { LotStates } from "../../../models/pooling/lot_state.ts";
import { sweepFor, sweepInto, type Variances } from "../../../models/pooling/sweep.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

// The nested formulas against the same model written out as full matrices.

const VARIANCES: Variances = [0.5, 0.2, 0.1, 0.3];

/** Two lots, uneven everywhere, with repeats, widths, and readings of whole dies and wafers. */
function unevenReadings(): LotObservation[] {
  const random = randomFrom("uneven");
  const out: LotObservation[] = [];
  const add = (lot: string, wafer: string, die?: string, guide?: string, widthUm?: number) =>
    out.push({
      lot,
      wafer,
      ...(die === undefined ? {} : { die }),
      ...(guide === undefined ? {} : { guide }),
      ...(widthUm === undefined ? {} : { widthUm }),
      value: 3 + random.normal(),
      u: 0.1 + random.uniform(),
      index: out.length,
    });
  add("A", "A1", "A1/1", "A1/1/a", 5);
  add("A", "A1", "A1/1", "A1/1/a", 5);
  add("A", "A1", "A1/1", "A1/1/b", 6);
  add("A", "A1", "A1/2", "A1/2/a", 6);
  add("A", "A1", "A1/2");
  add("A", "A1");
  add("A", "A2", "A2/1", "A2/1/a", 5);
  add("B", "B1", "B1/1", "B1/1/a", 6);
  add("B", "B1", "B1/1", "B1/1/b", 7);
  add("B", "B2");
  return out;
}

const PLACES = new Map([
  ["A1/1", { x: 1, y: 0 }],
  ["A1/2", { x: -1, y: 2 }],
  ["A1/3", { x: 2, y: 1 }],
  ["A2/1", { x: 0, y: -2 }],
  ["A3/1", { x: 1, y: 1 }],
  ["B1/1", { x: -2, y: -1 }],
]);
const ASKED: Asked[] = [
  { lot: "A", wafer: "A1", die: "A1/1", guide: "A1/1/a", widthUm: 5 },
  { lot: "A", wafer: "A1", die: "A1/1", guide: "A1/1/z", widthUm: 6 },
  { lot: "A", wafer: "A1", die: "A1/3", guide: "A1/3/a", widthUm: 7 },
  { lot: "A", wafer: "A3", die: "A3/1", guide: "A3/1/a", widthUm: 5 },
  { lot: "A", wafer: "A1", die: "A1/2" },
  { lot: "A", wafer: "A1" },
];

function setUp(trend: boolean) {
  const observations = unevenReadings();
  const leaves = leavesOf(observations, 1);
  const design = designOf({
    leaves,
    mean: { value: 2.5, u: 0.7 },
    widthSd: 0.4,
    trend: trend ? { radial: true, linear: true, lots: "own" } : null,
    trendSd: 0.6,
    places: PLACES,
    lot: "A",
  });
  const forest = forestOf(leaves, design.names.length + 1, (l) => [l.value, ...design.rowOf(l)]);
  return { leaves: forest.leaves, design, forest };
}

/** Covariance of the sums of effects of two units that are asked for. */
function effectCovariance(a: Asked, b: Asked): number {
  const [lot, wafer, die, guide] = VARIANCES;
  let v = 0;
  if (a.lot === b.lot) v += lot;
  if (a.wafer === b.wafer) v += wafer;
  if (a.die !== undefined && a.die === b.die && a.wafer === b.wafer) v += die;
  if (a.guide !== undefined && a.guide === b.guide) v += guide;
  return v;
}

function dense(trend: boolean) {
  const { leaves, design, forest } = setUp(trend);
  const p = design.names.length;
  const X = new Matrix(leaves.map((l) => design.rowOf(l)));
  const y = Matrix.columnVector(leaves.map((l) => l.value));
  const V = new Matrix(
    leaves.map((a, i) => leaves.map((b, j) => effectCovariance(a, b) + (i === j ? a.variance : 0))),
  );
  const priorCovariance = Matrix.diag(design.prior.sd.map((s) => s * s));
  const priorMean = Matrix.columnVector([...design.prior.mean]);
  // With the fixed effects integrated, the readings are one big normal.
  const total = Matrix.add(V, X.mmul(priorCovariance).mmul(X.transpose()));
  const off = Matrix.sub(y, X.mmul(priorMean));
  const solved = inverse(total).mmul(off);
  const logDet = new CholeskyDecomposition(total).lowerTriangularMatrix.diagonal()
    .reduce((s, d) => s + 2 * Math.log(d), 0);
  const ask = (asked: Asked) => {
    const row = Matrix.rowVector(design.rowOf(asked));
    const c = Matrix.add(
      Matrix.rowVector(leaves.map((l) => effectCovariance(asked, l))),
      row.mmul(priorCovariance).mmul(X.transpose()),
    );
    const before = effectCovariance(asked, asked) + row.mmul(priorCovariance).mmul(row.transpose()).get(0, 0);
    return {
      mean: row.mmul(priorMean).get(0, 0) + c.mmul(solved).get(0, 0),
      variance: before - c.mmul(inverse(total)).mmul(c.transpose()).get(0, 0),
      weights: c.mmul(inverse(total)).to1DArray(),
    };
  };
  const logLikelihood = -0.5 * (logDet + off.transpose().mmul(solved).get(0, 0));
  return { logLikelihood, ask, leaves, design, forest, p };
}

Deno.test("the nested likelihood is that of the full covariance matrix", () => {
  for (const trend of [false, true]) {
    const { logLikelihood, forest, design } = dense(trend);
    const nested = fixedEffects(sweepInto(forest, VARIANCES, sweepFor(forest)), design.prior);
    assertClose(nested.logLikelihood, logLikelihood, { rel: 1e-10 }, `trend ${trend}`);
  }
});

Deno.test("the nested posterior is that of the full covariance matrix, for all that can be asked", () => {
  for (const trend of [false, true]) {
    const { ask, forest, design } = dense(trend);
    const states = new LotStates(forest, "A");
    const sweep = sweepInto(forest, VARIANCES, sweepFor(forest));
    states.add(1, sweep, VARIANCES, fixedEffects(sweep, design.prior));
    for (const asked of ASKED) {
      const full = ask(asked);
      const nested = states.ask(asked, design.rowOf(asked));
      const what = `${asked.guide ?? asked.die ?? asked.wafer}, trend ${trend}`;
      assertClose(nested.mean[0]!, full.mean, { rel: 1e-10 }, `mean of ${what}`);
      assertClose(nested.variance[0]!, full.variance, { rel: 1e-9 }, `variance of ${what}`);
    }
  }
});

Deno.test("a lot without readings has the posterior of the full covariance matrix", () => {
  const { ask, forest, design } = dense(false);
  const states = new LotStates(forest, "C");
  const sweep = sweepInto(forest, VARIANCES, sweepFor(forest));
  states.add(1, sweep, VARIANCES, fixedEffects(sweep, design.prior));
  const asked = { lot: "C", wafer: "C1", die: "C1/1", guide: "C1/1/a", widthUm: 5 };
  const [nested, full] = [states.ask(asked, design.rowOf(asked)), ask(asked)];
  assertClose(nested.mean[0]!, full.mean, { rel: 1e-10 });
  assertClose(nested.variance[0]!, full.variance, { rel: 1e-10 });
});

Deno.test("informationShares() are the weights of the readings in the full posterior", () => {
  // Without widths and trend, so that every reading's weight is in the mean.
  const observations = unevenReadings().map(({ widthUm: _, ...o }) => o);
  const leaves = leavesOf(observations, 1);
  const forest = forestOf(leaves, 2, (l) => [l.value, 1]);
  const sweep = sweepInto(forest, VARIANCES, sweepFor(forest));
  const priorSd = 0.7;
  const V = new Matrix(
    forest.leaves.map((a, i) =>
      forest.leaves.map((b, j) => effectCovariance(a, b) + priorSd ** 2 + (i === j ? a.variance : 0))
    ),
  );
  for (const asked of ASKED) {
    const c = Matrix.rowVector(forest.leaves.map((l) => effectCovariance(asked, l) + priorSd ** 2));
    const weights = c.mmul(inverse(V)).to1DArray();
    const sumOver = (of: (l: Asked) => boolean) =>
      weights.reduce((s, w, k) => of(forest.leaves[k]!) ? s + w : s, 0);
    const own = sumOver((l) => asked.guide !== undefined && l.guide === asked.guide);
    const die = sumOver((l) => asked.die !== undefined && l.die === asked.die && l.wafer === asked.wafer);
    const wafer = sumOver((l) => l.wafer === asked.wafer);
    const lot = sumOver((l) => l.lot === asked.lot);
    const all = sumOver(() => true);
    const found = informationShares(forest, sweep, VARIANCES, 1 / priorSd ** 2, asked);
    const expected = {
      own,
      die: die - own,
      wafer: wafer - die,
      lot: lot - wafer,
      lots: all - lot,
      prior: 1 - all,
    };
    for (const [level, share] of Object.entries(expected)) {
      const what = `${level} share of ${asked.guide ?? asked.die ?? asked.wafer}`;
      assertClose(found[level as keyof typeof found], share, { abs: 1e-10 }, what);
    }
  }
});
