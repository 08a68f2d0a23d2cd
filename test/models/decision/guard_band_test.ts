import assert from "node:assert/strict";
import { globalRisks, guardBand } from "../../../models/decision/guard_band.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

const stats = JSON.parse(Deno.readTextFileSync("fixtures/check-values/stats.json"));

Deno.test("guardBand() has the multipliers of the normal", () => {
  for (const [confidence, z] of Object.entries(stats.z_for_conformance)) {
    assertClose(guardBand(2, Number(confidence)), 2 * (z as number), { rel: 1e-7 }, confidence);
  }
  assert.equal(guardBand(1, 0.5), 0);
  assert.throws(() => guardBand(1, 0.4), RangeError);
  assert.throws(() => guardBand(-1, 0.9), RangeError);
});

Deno.test("guardBand() gives the reading that proves speeding", () => {
  // JCGM 106:2012, speed example: limit 100 km/h, relative u 2 %, 99.9 %: 107 km/h (from memory, recomputed 106.588).
  const { limit, u_rel, conf, min_indication } = stats.jcgm106.speed;
  assertClose(limit / (1 - guardBand(u_rel, conf)), min_indication, { rel: 1e-9 });
});

Deno.test("globalRisks() gives the risks of the resistor example", () => {
  // JCGM 106:2012, resistors of 1500 Ω: inputs from memory, risks by two-dimensional quadrature.
  const { conforming, cases } = stats.jcgm106.resistor;
  for (const { acceptance_half_width: a, consumer_risk, producer_risk } of cases) {
    const risks = globalRisks({ mean: 0, sd: 0.12 }, 0.04, { low: -0.2, high: 0.2 }, { low: -a, high: a });
    assertClose(risks.conforming, conforming, { abs: 1e-7 });
    assertClose(risks.consumer, consumer_risk, { abs: 1e-7 }, `consumer at ${a}`);
    assertClose(risks.producer, producer_risk, { abs: 1e-7 }, `producer at ${a}`);
  }
});

Deno.test("globalRisks() agrees with a simulated process with one-sided limits", () => {
  const random = randomFrom("risks");
  const n = 200_000;
  let [consumer, producer] = [0, 0];
  for (let k = 0; k < n; k++) {
    const truth = 1 + 0.5 * random.normal();
    const accepted = truth + 0.3 * random.normal() >= 0.9;
    if (accepted && truth < 0.7) consumer++;
    if (!accepted && truth >= 0.7) producer++;
  }
  const risks = globalRisks({ mean: 1, sd: 0.5 }, 0.3, { low: 0.7, high: Infinity }, {
    low: 0.9,
    high: Infinity,
  });
  const within = (p: number) => ({ abs: 4 * Math.sqrt(p * (1 - p) / n) });
  assertClose(consumer / n, risks.consumer, within(risks.consumer), "consumer");
  assertClose(producer / n, risks.producer, within(risks.producer), "producer");
});
