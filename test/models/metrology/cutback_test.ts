import { deepStrictEqual, ok, strictEqual, throws } from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import {
  type CutbackFit,
  fitCommonSlope,
  fitCutback,
  fitLines,
  isRefused,
  type LineFit,
} from "../../../models/metrology/mod.ts";
import { studentTails } from "../../../models/metrology/_tails.ts";
import { randomFrom } from "../../../shared/random.ts";

const read = (name: string) =>
  JSON.parse(Deno.readTextFileSync(new URL(`../../../fixtures/check-values/${name}.json`, import.meta.url)));
const loss = read("loss");
const norris = read("norris");
const calibration = read("stats").linear_calibration;

function fittedLine(result: ReturnType<typeof fitLines>): LineFit {
  if (isRefused(result)) throw new Error(result.refused);
  return result;
}
function fittedCutback(result: ReturnType<typeof fitCutback>): CutbackFit {
  if (isRefused(result)) throw new Error(result.refused);
  return result;
}

Deno.test("fitLines() meets both weighted examples of ISO/TS 28037, covariance and χ² included", () => {
  // ISO/TS 28037:2010, 6.3 (printed to three decimals; recomputed to eight in fixtures/check-values/stats.json)
  for (const c of calibration.iso28037) {
    const fit = fittedLine(
      fitLines([c.x.map((x: number, k: number) => ({ x, y: c.y[k], u: c.u[k] }))]),
    );
    assertClose(fit.intercept[0]!, c.a, { abs: 6e-9 }, "a");
    assertClose(fit.slope, c.b, { abs: 6e-9 }, "b");
    assertClose(fit.uIntercept[0]!, c.ua, { abs: 6e-9 }, "u(a)");
    assertClose(fit.uSlope, c.ub, { abs: 6e-9 }, "u(b)");
    assertClose(fit.covariance[0]!, c.cov, { abs: 6e-9 }, "cov");
    assertClose(fit.chiSquared!, c.chi2, { abs: 6e-9 }, "chi2");
    strictEqual(fit.degreesOfFreedom, 4);
    // even degrees of freedom: P = e^{−x/2}(1 + x/2)
    assertClose(fit.pValue!, Math.exp(-c.chi2 / 2) * (1 + c.chi2 / 2), { rel: 1e-7 }, "p");
  }
});

Deno.test("fitLines() meets the certified values of Norris", () => {
  // NIST Statistical Reference Datasets, Norris: certified values
  const points = norris.x.map((x: number, k: number) => ({ x, y: norris.y[k], u: 0 }));
  const fit = fittedLine(fitLines([points]));
  const certified = norris.certified;
  assertClose(fit.intercept[0]!, certified.B0, { rel: 1e-11 });
  assertClose(fit.slope, certified.B1, { rel: 1e-13 });
  assertClose(fit.uIntercept[0]!, certified.se_B0, { rel: 1e-10 });
  assertClose(fit.uSlope, certified.se_B1, { rel: 1e-10 });
  assertClose(fit.residualSd!, certified.residual_sd, { rel: 1e-10 });
  strictEqual(fit.uncertainty, "scatter");
  strictEqual(fit.chiSquared, null);
});

Deno.test("fitCutback() meets the worked cut-back", () => {
  // fixtures/check-values/loss.json: invented data, textbook least squares
  const { data, result } = loss.cutback;
  const points = data.L_cm.map((cm: number, k: number) => ({
    length: cm / 100,
    lossDb: -data.T_dB[k],
    u: 0,
  }));
  const cut = fittedCutback(fitCutback(points));
  assertClose(cut.slope_db_cm.value, -result.slope_dB_cm, { abs: 1e-10 });
  assertClose(cut.slope_db_cm.u, result.se_slope, { abs: 1e-10 });
  assertClose(cut.coupling_db[0]!.value, -result.intercept_dB, { abs: 1e-10 });
  assertClose(cut.coupling_db[0]!.u, result.se_intercept, { abs: 1e-10 });
  assertClose(cut.fit.residualSd!, result.residual_sd, { abs: 1e-10 });
  // 0.1 dB/cm = 2.302585 1/m
  assertClose(cut.alpha.value, 0.168 * 23.02585093, { rel: 1e-9 });
  deepStrictEqual(cut.used.map((at) => at.point), [0, 1, 2, 3, 4]);
  deepStrictEqual(cut.fit.outliers, []);
  // its 95 % half width rests on t(0.975; 3 degrees of freedom)
  assertClose(studentTails(result.ci95_half_width_slope / result.se_slope, 3), 0.05, { abs: 1e-8 });
});

Deno.test("studentTails() meets printed quantiles for even, odd and one degree of freedom", () => {
  // two-sided 5 % points of Student's t, any printed table
  for (
    const [dof, t] of [[1, 12.7062], [2, 4.30265], [3, 3.18245], [4, 2.77645], [10, 2.22814], [29, 2.04523]]
  ) {
    assertClose(studentTails(t!, dof!), 0.05, { abs: 2e-6 }, `dof ${dof}`);
  }
  assertClose(studentTails(0, 5), 1, { abs: 1e-15 });
});

Deno.test("a straight line comes back at any scale and place, with its covariance", () => {
  const number = fc.double({ min: -5, max: 5, noNaN: true });
  fc.assert(
    fc.property(number, number, fc.constantFrom(1e-9, 1, 1e9), number, (slope, at, scale, from) => {
      const points = [0, 1, 2.5, 4].map((k) => {
        const x = (from + k) * scale;
        return { x, y: at + slope * x / scale, u: 0.1 + k / 10 };
      });
      const fit = fittedLine(fitLines([points]));
      assertClose(fit.slope * scale, slope, { rel: 1e-11, abs: 1e-11 });
      assertClose(fit.intercept[0]!, at, { rel: 1e-11, abs: 1e-10 });
      // u of the line at the weighted mean is the least, 1/√Σw
      const w = points.map((p) => 1 / p.u ** 2);
      const sum = w.reduce((a, b) => a + b);
      const middle = points.reduce((s, p, k) => s + w[k]! * p.x, 0) / sum;
      const variance = fit.uIntercept[0]! ** 2 + 2 * middle * fit.covariance[0]! + (middle * fit.uSlope) ** 2;
      assertClose(variance, 1 / sum, { rel: 1e-6 });
    }),
    { numRuns: 60, seed: 3 },
  );
});

Deno.test("an outlier is named, and stays in the fit", () => {
  const points = [1, 2, 3, 4, 5, 6].map((cm) => ({ length: cm / 100, lossDb: 0.8 + 0.2 * cm, u: 0.02 }));
  const wrong = points.map((p, k) => k === 3 ? { ...p, lossDb: p.lossDb + 0.5 } : p);
  const clean = fittedCutback(fitCutback(points));
  const dirty = fittedCutback(fitCutback(wrong));
  deepStrictEqual(clean.fit.outliers, []);
  deepStrictEqual(dirty.fit.outliers, [{ group: 0, point: 3 }]);
  ok(dirty.fit.pValue! < 1e-6);
  ok(dirty.fit.scatterFactor > 5);
  ok(Math.abs(dirty.coupling_db[0]!.value - clean.coupling_db[0]!.value) > 0.01);
  strictEqual(dirty.used.length, 6);
  // of four readings a wild one pulls the line off all others: it alone is named
  const few = fittedCutback(fitCutback(wrong.slice(1, 5)));
  ok(few.fit.standardised[0]!.every((r) => Math.abs(r) > 3), few.fit.standardised.join());
  deepStrictEqual(few.fit.outliers, [{ group: 0, point: 2 }]);
  const both = wrong.map((p, k) => k === 0 ? { ...p, lossDb: p.lossDb - 0.9 } : p);
  deepStrictEqual(fittedCutback(fitCutback(both)).fit.outliers.map((at) => at.point), [0, 3]);
  // without u the same one stands out of its own scatter
  const loose = fittedCutback(
    fitCutback(wrong.map((p, k) => ({ ...p, lossDb: p.lossDb + 0.001 * (k % 3), u: 0 }))),
  );
  deepStrictEqual(loose.fit.outliers, [{ group: 0, point: 3 }]);
});

Deno.test("fitCutback() uncertainties cover: pulls of simulated cut-backs have unit spread", () => {
  const random = randomFrom("cut-back pulls");
  let squares = 0;
  let flagged = 0;
  const runs = 4000;
  for (let n = 0; n < runs; n++) {
    const points = [10, 17, 26, 40].map((mm) => ({
      length: mm / 1000,
      lossDb: 1.1 + 0.012 * mm + 0.05 * random.normal(),
      u: 0.05,
    }));
    const cut = fittedCutback(fitCutback(points));
    squares += ((cut.slope_db_cm.value - 0.12) / cut.slope_db_cm.u) ** 2;
    if (cut.fit.outliers.length > 0) flagged++;
  }
  assertClose(squares / runs, 1, { abs: 4 * Math.sqrt(2 / runs) });
  ok(flagged / runs < 0.06, `outliers in ${flagged} of ${runs}`);
});

Deno.test("fitCommonSlope() cancels couplings within guides, and shares one where each guide has one length", () => {
  const at = (cm: number, coupling: number) => ({ length: cm / 100, lossDb: coupling + 0.3 * cm, u: 0.05 });
  const own = fittedCutback(fitCommonSlope([[at(1, 0.7), at(2, 0.7)], [at(5, 3)], [at(2, 1.4), at(3, 1.4)]]));
  strictEqual(own.intercept, "own");
  assertClose(own.slope_db_cm.value, 0.3, { rel: 1e-12 });
  assertClose(own.coupling_db[1]!.value, 1.4, { rel: 1e-12 });
  deepStrictEqual(own.used, [
    { group: 0, point: 0 },
    { group: 0, point: 1 },
    { group: 2, point: 0 },
    { group: 2, point: 1 },
  ]);
  // Sxx = 2·2·(½ cm)² of equal weights
  assertClose(own.slope_db_cm.u, 0.05, { rel: 1e-12 });

  const common = fittedCutback(fitCommonSlope([[at(1, 0.7)], [at(2, 0.7)], [at(4, 0.7)]]));
  strictEqual(common.intercept, "common");
  assertClose(common.slope_db_cm.value, 0.3, { rel: 1e-12 });
  strictEqual(common.coupling_db.length, 1);
  deepStrictEqual(common.used.map((u) => u.group), [0, 1, 2]);
});

Deno.test("a cut-back without an answer is refused with the reason", () => {
  const at = (length: number, u = 0.05) => ({ length, lossDb: 1, u });
  const reason = (r: ReturnType<typeof fitCutback>) => isRefused(r) ? r.refused : "fitted";
  ok(reason(fitCutback([])).includes("0 cut-back readings"));
  ok(reason(fitCutback([at(0.01)])).includes("need two lengths"));
  ok(reason(fitCutback([at(0.01), at(0.01), at(0.01)])).includes("all at one length"));
  ok(reason(fitCutback([at(0.01, 0), at(0.02, 0)])).includes("nothing is left over"));
  ok(reason(fitCommonSlope([[at(0.01)], []])).includes("need two lengths"));
  ok(reason(fitCommonSlope([[at(0.01)], [at(0.01)]])).includes("all at one length"));
  throws(() => fitCutback([at(0.01), at(NaN)]), RangeError);
  throws(() => fitCutback([at(0.01), at(0.02, -1)]), RangeError);
  // two readings with u: a slope, an uncertainty, and nothing to test
  const two = fittedCutback(fitCutback([at(0.01), at(0.02)]));
  strictEqual(two.fit.pValue, null);
  assertClose(two.slope_db_cm.u, 0.05 * Math.SQRT2, { rel: 1e-12 });
  deepStrictEqual(two.fit.outliers, []);
});
