import { ok } from "node:assert/strict";
import binomial from "@stdlib/stats-base-dists-beta-cdf";
import { type GuideInputs, matchingPeriod, predictGuide } from "../../../models/decision/mod.ts";
import { mismatchOverTemperature } from "../../../models/guides/mod.ts";
import { phaseMatchingTemperatures } from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { guide, request, trait } from "./a_guide.ts";
import { doubling, solvedPlatform } from "./solved_guide.ts";

const GUIDES = 200;
const U = { width: 0.08, titanium: 1.5, offset: 300 };

Deno.test("over 200 simulated titanium guides the stated temperature covers the true one as often as it says", () => {
  const waves = doubling(1550, "TM");
  const { model } = solvedPlatform("ti-ln-zcut", 7, [waves]);
  const checked = request({
    process: "second-harmonic",
    polarisations: { pump: "TM", signal: "TM", idler: "TM" },
    signal: { wavelength_nm: 1550, average_power_mw: 10 },
    oven_c: [16, 129],
  });
  const nominal = { width_um: 7, titanium_nm: 100 };
  const period = matchingPeriod(model, { waves, geometry: nominal, temperatureC: 70 });
  let covered = 0;
  for (let k = 0; k < GUIDES; k++) {
    const random = randomFrom(`simulated titanium guide ${k}`);
    const made = {
      width_um: 7 + U.width * random.normal(),
      titanium_nm: 100 + U.titanium * random.normal(),
    };
    const offset = U.offset * random.normal();
    const bare = mismatchOverTemperature(model.index, waves, made);
    const [T] = phaseMatchingTemperatures(
      (t) => bare(t) + offset,
      (t) => 2 * Math.PI / (period * model.expansion(t)),
      [16, 129],
    ).roots;
    const inputs: GuideInputs = {
      ...guide,
      id: `S/01/g${k}`,
      geometry: nominal,
      geometryErrors: [
        { parameter: "width_um", trait: trait(0, U.width, "width") },
        { parameter: "titanium_nm", trait: trait(100, U.titanium, "titanium") },
      ],
      // Short: how its spectrum looks does not matter here, and it is quick.
      length: 0.003,
      poledLength: 0.002,
      period,
      offset: trait(0, U.offset, "offset"),
    };
    const { figures } = predictGuide(model, checked, inputs, { recorded: null });
    const found = figures.find((f) => f.figure === "operating_temperature_c")!;
    if (T !== undefined && found.lo! <= T && T <= found.hi!) covered++;
  }
  // P(at most / at least so many of 200 | p = 0.95) by the beta function; both tails at 0.5 %.
  const atMost = 1 - binomial(0.95, covered + 1, GUIDES - covered);
  const atLeast = covered === 0 ? 1 : binomial(0.95, covered, GUIDES - covered + 1);
  ok(atMost > 0.005 && atLeast > 0.005, `${covered} of ${GUIDES} covered, need about 190`);
});
