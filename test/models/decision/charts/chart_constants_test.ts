import assert from "node:assert/strict";
import {
  chartConstants,
  meanOfStandardDeviation,
  relativeSpreadOfDeviation,
} from "../../../../models/decision/charts/chart_constants.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

Deno.test("chartConstants() agrees with the table of constants", async () => {
  // ISO 7870-2 and the NIST/SEMATECH e-Handbook print 3 to 4 of these digits; the table holds 6.
  const stats = JSON.parse(await Deno.readTextFile("fixtures/check-values/stats.json"));
  const { columns, rows } = stats.control_chart_constants;
  assert.equal(rows.length, 16);
  for (const row of rows) {
    const found = chartConstants(row[0]);
    for (const [i, name] of columns.entries()) {
      assertClose(found[name as keyof typeof found], row[i], { abs: 6e-7 }, `${name} of ${row[0]}`);
    }
  }
});

Deno.test("chartConstants() of two and three values have closed forms", () => {
  // Of two: the range is |N(0, 2)|. Of three: E[R] = 3/√π, E[R²] = 2 + 3√3/π (moments of normal order statistics).
  const { PI, sqrt } = Math;
  assertClose(chartConstants(2).d2, 2 / sqrt(PI), { rel: 1e-13 });
  assertClose(chartConstants(2).d3, sqrt(2 - 4 / PI), { rel: 1e-12 });
  assertClose(chartConstants(3).d2, 3 / sqrt(PI), { rel: 1e-13 });
  assertClose(chartConstants(3).d3, sqrt(2 + 3 * sqrt(3) / PI - 9 / PI), { rel: 1e-12 });
  assertClose(chartConstants(2).c4, sqrt(2 / PI), { rel: 1e-15 });
  assertClose(chartConstants(3).c4, sqrt(PI) / 2, { rel: 1e-15 });
});

Deno.test("chartConstants() are the moments of simulated ranges and deviations", () => {
  const random = randomFrom("ranges");
  const n = 7;
  const draws = 40000;
  let [sum, squares, deviations] = [0, 0, 0];
  for (let k = 0; k < draws; k++) {
    const x = Array.from({ length: n }, () => random.normal());
    const range = Math.max(...x) - Math.min(...x);
    const centre = x.reduce((a, b) => a + b, 0) / n;
    sum += range;
    squares += range * range;
    deviations += Math.sqrt(x.reduce((a, b) => a + (b - centre) ** 2, 0) / (n - 1));
  }
  const c = chartConstants(n);
  // Five standard errors each.
  assertClose(sum / draws, c.d2, { abs: 5 * c.d3 / 200 });
  assertClose(Math.sqrt(squares / draws - (sum / draws) ** 2), c.d3, { rel: 0.02 });
  assertClose(deviations / draws, c.c4, { abs: 5 * 0.3 / 200 });
});

Deno.test("meanOfStandardDeviation() goes over into its series without a step", () => {
  // c4 satisfies c4(n)·c4(n+1) = (n − 1)/√(n(n − 1)) exactly, across the change of method too.
  for (const n of [2, 3, 17, 1999, 2000, 2001, 50000]) {
    assertClose(
      meanOfStandardDeviation(n) * meanOfStandardDeviation(n + 1),
      Math.sqrt((n - 1) / n),
      { rel: 1e-14 },
      `c4 of ${n}`,
    );
  }
  // The relative spread of s tends to 1/√(2(n − 1)).
  assertClose(relativeSpreadOfDeviation(100001) * Math.sqrt(2e5), 1, { rel: 1e-5 });
});

Deno.test("chartConstants() refuses groups without a range", () => {
  for (const n of [1, 2.5, 101, NaN]) assert.throws(() => chartConstants(n), RangeError);
  assert.throws(() => meanOfStandardDeviation(1), /need an integer >= 2/);
});
