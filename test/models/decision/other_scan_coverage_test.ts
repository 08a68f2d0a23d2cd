import { ok } from "node:assert/strict";
import betaCdf from "@stdlib/stats-base-dists-beta-cdf";
import { type GuideInputs, matchingPeriod, predictGuide } from "../../../models/decision/mod.ts";
import { mismatch, mismatchOverTemperature } from "../../../models/guides/mod.ts";
import { phaseMatchingTemperatures } from "../../../models/poling/mod.ts";
import { mean } from "../../../shared/statistics.ts";
import { randomFrom } from "../../../shared/random.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";
import { guide, request, trait } from "./a_guide.ts";
import { doubling, solvedPlatform, TYPE_TWO } from "./solved_guide.ts";

const GUIDES = 240;
/** Where the scans are made, °C. */
const SCANNED_AT = 35;

interface Case {
  readonly platform: "ti-ln-zcut" | "rb-ktp-zcut";
  readonly asked: ThreeWaves;
  readonly scanned: ThreeWaves;
  readonly width: number;
  /** Standard deviations: of the width (µm), of what each process' calculation is wrong by (1/m), of a scan's fit (1/m). */
  readonly uWidth: number;
  readonly uAsked: number;
  readonly uExpected: number;
  readonly uScan: number;
  /** The most that a scan may leave of the temperature's u. */
  readonly left: number;
}

const CASES: Readonly<Record<string, Case>> = {
  "titanium type-0 guides by a scan at another wavelength": {
    platform: "ti-ln-zcut",
    asked: doubling(1550, "TM"),
    scanned: doubling(1650, "TM"),
    width: 7,
    uWidth: 0.1,
    uAsked: 30,
    uExpected: 60,
    uScan: 10,
    left: 0.4,
  },
  // Asked at a width where it hardly depends on the width to first order: its second order follows the scan, too.
  "rubidium type-II guides near their non-critical width by a type-0 scan": {
    platform: "rb-ktp-zcut",
    asked: TYPE_TWO,
    scanned: doubling(1582, "TM"),
    width: 3.2,
    uWidth: 0.12,
    uAsked: 10,
    uExpected: 60,
    uScan: 10,
    left: 0.7,
  },
};

for (const [name, c] of Object.entries(CASES)) {
  Deno.test(`over ${GUIDES} simulated ${name} the stated temperature covers the true one, and its u falls`, () => {
    const { platform, asked, scanned, width, uWidth, uAsked, uExpected, uScan } = c;
    const { model } = solvedPlatform(platform, width, [asked, scanned]);
    const checked = request({
      process: "second-harmonic",
      polarisations: { pump: asked.polP, signal: asked.polS, idler: asked.polI },
      signal: { wavelength_nm: asked.lambdaS * 1e9, average_power_mw: 10 },
      oven_c: [16, 129],
    });
    const geometry = { width_um: width };
    const period = matchingPeriod(model, { waves: asked, geometry, temperatureC: 70 });
    const scanOf = (width_um: number) => mismatch(model.index, scanned, SCANNED_AT, { width_um });
    const found = Array.from({ length: GUIDES }, (_, k) => {
      const random = randomFrom(`${name} ${k}`);
      const made = { width_um: width + uWidth * random.normal() };
      const offset = uAsked * random.normal();
      const bare = mismatchOverTemperature(model.index, asked, made);
      const [T] = phaseMatchingTemperatures(
        (t) => bare(t) + offset,
        (t) => 2 * Math.PI / (period * model.expansion(t)),
        [16, 129],
      ).roots;
      // The calculation of the scanned process is 400 1/m off on average, which is what others' scans suggest.
      const scan = scanOf(made.width_um) - scanOf(width) + 400 + uExpected * random.normal() +
        uScan * random.normal();
      const inputs: GuideInputs = {
        ...guide,
        id: `S/01/g${k}`,
        geometry,
        geometryErrors: [{ parameter: "width_um", trait: trait(0, uWidth, "width") }],
        // Short: how its spectrum looks does not matter here, and it is quick.
        length: 0.003,
        poledLength: 0.002,
        period,
        offset: trait(0, uAsked, "offset"),
      };
      const otherScans = [{
        waves: scanned,
        offset: { ...trait(scan, uScan, "scan"), basis: "measured" as const },
        expected: { value: 400, u: uExpected },
        read: 0,
        shares: {},
      }];
      const temperature = (of: GuideInputs) =>
        predictGuide(model, checked, of, { recorded: null }).figures
          .find((f) => f.figure === "operating_temperature_c")!;
      return { T, without: temperature(inputs), with: temperature({ ...inputs, otherScans }) };
    });
    const covered = found.filter(({ T, with: { lo, hi } }) => T !== undefined && lo! <= T && T <= hi!).length;
    // P(at most / at least so many | p = 0.95) by the beta function; both tails at 0.5 %.
    const atMost = covered === GUIDES ? 1 : 1 - betaCdf(0.95, covered + 1, GUIDES - covered);
    const atLeast = covered === 0 ? 1 : betaCdf(0.95, covered, GUIDES - covered + 1);
    ok(atMost > 0.005 && atLeast > 0.005, `${covered} of ${GUIDES} covered, need about ${0.95 * GUIDES}`);
    const u = (which: "with" | "without") => mean(found.map((f) => f[which].u!));
    const error = (which: "with" | "without") =>
      Math.sqrt(mean(found.filter((f) => f.T !== undefined).map((f) => (f[which].mean! - f.T!) ** 2)));
    ok(u("with") < c.left * u("without"), `${u("with")} with, ${u("without")} without`);
    // Not only said: the temperature stated is nearer to the true one as well.
    ok(error("with") < c.left * error("without"), `${error("with")} with, ${error("without")} without`);
  });
}
