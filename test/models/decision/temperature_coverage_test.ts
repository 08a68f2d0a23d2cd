import { ok } from "node:assert/strict";
import binomial from "@stdlib/stats-base-dists-beta-cdf";
import { type GuideInputs, matchingPeriod, predictGuide } from "../../../models/decision/mod.ts";
import { mismatchOverTemperature } from "../../../models/guides/mod.ts";
import { phaseMatchingTemperatures } from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { guide, request, trait } from "./a_guide.ts";
import type { GuideGeometry, ThreeWaves } from "../../../shared/vocabulary.ts";
import { doubling, solvedPlatform, TYPE_TWO } from "./solved_guide.ts";

const GUIDES = 200;

interface Case {
  readonly platform: "ti-ln-zcut" | "rb-ktp-zcut";
  readonly waves: ThreeWaves;
  readonly polarisations: {
    readonly pump: "TE" | "TM";
    readonly signal: "TE" | "TM";
    readonly idler: "TE" | "TM";
  };
  /** Parameters with their drawn value and standard uncertainty; of the width, whose trait is an error, of that. */
  readonly parameters: readonly (readonly ["width_um" | "titanium_nm", number, number])[];
  /** Standard uncertainty of Δβ, 1/m. */
  readonly offset: number;
}

const CASES: Readonly<Record<string, Case>> = {
  titanium: {
    platform: "ti-ln-zcut",
    waves: doubling(1550, "TM"),
    polarisations: { pump: "TM", signal: "TM", idler: "TM" },
    parameters: [["width_um", 7, 0.08], ["titanium_nm", 100, 1.5]],
    offset: 300,
  },
  // At its non-critical width: every width error lowers Δβ, so that the temperatures are anything but normal.
  rubidium: {
    platform: "rb-ktp-zcut",
    waves: TYPE_TWO,
    polarisations: { pump: "TE", signal: "TE", idler: "TM" },
    parameters: [["width_um", 3.04, 0.12]],
    offset: 10,
  },
};

for (const [name, { platform, waves, polarisations, parameters, offset: uOffset }] of Object.entries(CASES)) {
  Deno.test(`over 200 simulated ${name} guides the stated temperature covers the true one as often as it says`, () => {
    const [, width] = parameters[0]!;
    const { model } = solvedPlatform(platform, width, [waves]);
    const checked = request({
      process: "second-harmonic",
      polarisations,
      signal: { wavelength_nm: waves.lambdaS * 1e9, average_power_mw: 10 },
      oven_c: [16, 129],
    });
    const geometryOf = (value: (nominal: number, u: number) => number) =>
      Object.fromEntries(parameters.map(([key, nominal, u]) => [key, value(nominal, u)])) as unknown as
        & GuideGeometry
        & Record<string, number>;
    const nominal = geometryOf((x) => x);
    const period = matchingPeriod(model, { waves, geometry: nominal, temperatureC: 70 });
    let covered = 0;
    for (let k = 0; k < GUIDES; k++) {
      const random = randomFrom(`simulated ${name} guide ${k}`);
      const made = geometryOf((x, u) => x + u * random.normal());
      const offset = uOffset * random.normal();
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
        geometryErrors: parameters.map(([parameter, x, u]) => ({
          parameter,
          trait: trait(parameter === "width_um" ? 0 : x, u, parameter),
        })),
        // Short: how its spectrum looks does not matter here, and it is quick.
        length: 0.003,
        poledLength: 0.002,
        period,
        offset: trait(0, uOffset, "offset"),
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
}
